"""The words of a scene file, as pydantic models: what may be written, table by table.

Here a value is checked on its own: its type, its range, its spelling. What two keys or two tables
mean together is checked where the scene is put together. The descriptions go into the JSON Schema,
where editors show them.
"""

from typing import Annotated, Literal

from pydantic import ConfigDict, Field, Tag

from lumentrace.scene.values import (
    Count,
    Direction,
    EventCount,
    FilePath,
    Form,
    Length,
    Memory,
    Name,
    NotNegative,
    Number,
    Point,
    Positive,
    Priority,
    Seed,
    Share,
    Size,
    Text,
    Wavelength,
    Yes,
    copies_of,
    either,
    key,
    one_of,
)

_LENGTH = 'unit of length: "mm", "cm", "m", "in" or "ft"'


class LibraryStudyForm(Form):
    """Of [study] an included file gives only the unit of its own numbers, and its own includes."""

    length: Length | None = key(f"The {_LENGTH}; by default that of the study.", None)
    include: tuple[FilePath, ...] = key("More files, relative to this one.", ())


class StudyForm(Form):
    """What the study is called, its unit of length, and what surrounds its parts."""

    title: Text = key("What people call the study.", "")
    length: Length = key(f"The {_LENGTH}, of every mesh and every length in this file.", "mm")
    seed: Seed = key("Chooses the random numbers: the same seed, the same results.", 1)
    include: tuple[FilePath, ...] = key(
        "Files that hold media, finishes, parts, sources and detectors, relative to this file.", ()
    )
    surroundings: Text = key("Name of the medium around all parts.", "air")
    touch: NotNegative | None = key(
        "Parts within this distance touch (length); by default the rounding of their files.", None
    )


class MediumForm(Form):
    """What fills a volume."""

    index: Annotated[Positive, Field(le=10)] = key("Refractive index relative to air.")
    absorption: NotNegative = key("Absorption coefficient (1/length), as in exp(-a x).", 0.0)


class FinishForm(Form):
    """What a surface does with light: shares of what falls on it; the rest is absorbed."""

    diffuse: Share = key("Share reflected in all directions (Lambertian).", 0.0)
    mirror: Share = key("Share reflected as by a mirror.", 0.0)
    diffuse_through: Share = key("Share passed on in all directions (Lambertian).", 0.0)


class TurnForm(Form):
    """A right-handed rotation about an axis through the origin."""

    axis: Direction = key("Direction of the axis.")
    degrees: Number = key("Angle (degrees).")


Turns = Annotated[
    Annotated[TurnForm, Tag("<table>")] | Annotated[tuple[TurnForm, ...], Tag("<list>")],
    either("a turn is { axis = [x, y, z], degrees = ... }, or a list of them"),
]


class GridForm(Form):
    """Copies in rows along the scene's axes; the first stands where the part does."""

    count: tuple[Count, Count, Count] = key("Copies along x, y and z.")
    step: Point = key("Distance from copy to copy along x, y and z (length).")


class RingForm(Form):
    """Copies in a circle."""

    count: Count = key("Number of copies.")
    axis: Direction = key("Direction of the axis.")
    degrees: Number = key("Angle from copy to copy (degrees).")
    center: Point = key("A point on the axis (length).", (0.0, 0.0, 0.0))


Repeat = Annotated[
    Annotated[GridForm, Tag("<grid>")] | Annotated[RingForm, Tag("<ring>")],
    either("a table with count and step, or with count, axis and degrees", copies_of),
]


class TubeForm(Form):
    """The space between two cylinders about one axis."""

    from_: Point = key("Middle of one end.", alias="from")
    to: Point = key("Middle of the other end.")
    radius: tuple[NotNegative, Positive] = key("Inner and outer radius.")


class PickForm(Form):
    """A choice of faces, in the mesh file's own frame and unit. All keys given must hold."""

    model_config = ConfigDict(
        json_schema_extra={
            "minProperties": 1,
            "dependentRequired": {
                "facing": ["within"],
                "within": ["facing"],
                "grow_from": ["over"],
                "over": ["grow_from"],
            },
        }
    )

    facing: Direction | None = key("Direction in which the faces' normals point.", None)
    within: Annotated[NotNegative, Field(le=180)] | None = key(
        "Largest angle between a normal and `facing` (degrees).", None
    )
    box: tuple[Point, Point] | None = key("Smallest and largest corner of a box.", None)
    grow_from: Point | None = key("Begin at the face nearest to this point.", None)
    over: Annotated[NotNegative, Field(le=180)] | None = key(
        "Grow across edges that bend less than this (degrees).", None
    )
    tube: TubeForm | None = key("Within a tube.", None)
    tag: Text | None = key("The mesh file's own tag of this name.", None)


Picks = Annotated[
    Annotated[PickForm, Tag("<table>")] | Annotated[tuple[PickForm, ...], Tag("<list>")],
    either("a pick is { facing = ..., within = ... } and the like, or a list of them"),
]


class TagForm(Form):
    """A name for some faces of a part. The first rule that takes a face has it."""

    name: Name = key("Name of the tag.")
    pick: Picks = key("Which faces: all keys of a pick must hold; of a list of picks, any.")


class SidesForm(Form):
    """Finishes of the two sides of a sheet."""

    front: Text = key("Finish of the side to which the normals point.")
    back: Text = key("Finish of the other side.")


_SIDES = "{ front = ..., back = ... }"
FinishOf = Annotated[
    Annotated[Text, Tag("<word>")] | Annotated[SidesForm, Tag("<table>")],
    either(f"the name of a finish is needed, or {_SIDES} on a sheet"),
]
Finishes = Annotated[
    Annotated[Text, Tag("<word>")] | Annotated[dict[str, FinishOf], Tag("<table>")],
    either("the name of a finish is needed, or a table of them by tag"),
]


class PartForm(Form):
    """One body: a mesh, where it stands, what is inside it and what its faces do."""

    name: Name = key("Name of the part.")
    mesh: FilePath = key("STL or OBJ file, relative to this file.")
    medium: Text = key(
        'Name of the medium inside; "opaque": no light inside; "sheet": a thin surface.'
    )
    finish: Finishes | None = key(
        f"A finish, or finishes by tag ({{ default = ..., rim = ... }}); {_SIDES} on a sheet. "
        "By default uncoated on transparent parts.",
        None,
    )
    turn: Turns | None = key("Rotation about the mesh's own origin; a list in its order.", None)
    at: Point = key("Where the mesh's origin is moved to, after `turn` (length).", (0.0, 0.0, 0.0))
    repeat: Repeat | None = key("Copies of the part: in rows, or in a circle.", None)
    take: Annotated[tuple[Text, ...], Field(min_length=1)] | None = key(
        "Only these groups, objects, solids or materials of the mesh file.", None
    )
    length: Length | None = key(f"The {_LENGTH}, of this mesh file.", None)
    use: Yes = key("false leaves the part out.", True)
    priority: Priority = key("Where transparent parts share space, the larger one is there.", 0)
    flip: Yes = key("true turns the normals of the mesh round.", False)
    tag: tuple[TagForm, ...] = key("Names for some faces of the part.", ())


class FacesForm(Form):
    """Faces of a part."""

    part: Text = key("Name of the part.")
    tag: Text | None = key("Only the faces of this tag.", None)


class DiscForm(Form):
    """A round plane that shines to the side of its normal."""

    center: Point = key("Center (length).")
    normal: Direction = key("Direction in which it shines.")
    radius: Positive = key("Radius (length).")


class RectangleForm(Form):
    """A rectangular plane that shines to the side of its normal."""

    center: Point = key("Center (length).")
    normal: Direction = key("Direction in which it shines.")
    across: Direction = key("Direction of the first side.")
    size: Size = key("Sides along `across` and along normal x across (length).")


class FluxForm(Form):
    """How much light a source gives: one of watts, lumens, irradiance."""

    model_config = ConfigDict(json_schema_extra=one_of("watts", "lumens", "irradiance"))

    watts: Positive | None = key("Radiant flux (W), over all copies.", None)
    lumens: Positive | None = key("Luminous flux (lm), over all copies.", None)
    irradiance: Positive | None = key("Of a disc or rectangle: flux per area (W/m2).", None)
    each: Yes = key("true: the flux is that of every copy of the part.", False)


class PatternForm(Form):
    """Directions with a number: one of cosine_power, collimated."""

    model_config = ConfigDict(json_schema_extra=one_of("cosine_power", "collimated"))

    cosine_power: NotNegative | None = key("Exponent m: intensity as cos^m.", None)
    collimated: Annotated[NotNegative, Field(le=90)] | None = key(
        "Half-angle of a cone of uniform radiance (degrees); 0: a parallel beam.", None
    )


PATTERNS = '"lambertian", "isotropic", { cosine_power = m } or { collimated = degrees }'
PatternWord = Literal["lambertian", "isotropic"]
Pattern = Annotated[
    Annotated[PatternWord, Tag("<word>")] | Annotated[PatternForm, Tag("<table>")],
    either(f"allowed: {PATTERNS}"),
]


class SpectrumForm(Form):
    """The colour of the light."""

    line: Wavelength = key("One wavelength (nm), 100 to 100 000.")


class SourceForm(Form):
    """Where light starts: one of faces, point, disc, rectangle."""

    model_config = ConfigDict(json_schema_extra=one_of("faces", "point", "disc", "rectangle"))

    name: Name = key("Name of the source.")
    faces: FacesForm | None = key("Faces of a part shine.", None)
    point: Point | None = key("A point shines in all directions (length).", None)
    disc: DiscForm | None = key("A round plane shines.", None)
    rectangle: RectangleForm | None = key("A rectangular plane shines.", None)
    flux: FluxForm = key("{ watts = ... }, { lumens = ... } or { irradiance = ... }.")
    pattern: Pattern | None = key(
        f'{PATTERNS}; only a point may leave it out: it is "isotropic".',
        None,
    )
    spectrum: SpectrumForm = key("{ line = wavelength in nm }.")
    group: Name | None = key("Sources of one group are measured as one.", None)
    share: Positive = key("Gives the source this many times its share of the rays.", 1.0)
    turn: Turns | None = key("Rotation about the scene's origin; a list in its order.", None)
    at: Point = key("Displacement after `turn` (length).", (0.0, 0.0, 0.0))
    use: Yes = key("false leaves the source out.", True)


class PlaneForm(Form):
    """A rectangle divided into cells."""

    center: Point = key("Center (length).")
    normal: Direction = key("Points out of the front; light against it is counted.")
    across: Direction = key("Direction along which the first count of cells runs.")
    size: Size = key("Sides along `across` and along normal x across (length).")
    cells: tuple[Count, Count] = key("Cells along `across` and along normal x across.")


class DetectorForm(Form):
    """What counts light."""

    name: Name = key("Name of the detector.")
    plane: PlaneForm = key("{ center, normal, across, size, cells }.")
    counts: Literal["irradiance", "illuminance"] = key("W/m2 or lx.", "irradiance")
    side: Literal["front", "both"] = key("Which side counts.", "front")
    catch: Yes = key("true: light that is counted ends here.", False)
    turn: Turns | None = key("Rotation about the scene's origin; a list in its order.", None)
    at: Point = key("Displacement after `turn` (length).", (0.0, 0.0, 0.0))
    use: Yes = key("false leaves the detector out.", True)


class UntilForm(Form):
    """When enough is known."""

    measure: Text = key('A measure, such as "desk.mean".')
    relative_error: Annotated[Positive, Field(lt=1)] = key("Standard error over value, 0.01: 1 %.")


class TraceForm(Form):
    """How many rays, and the bounds of the work."""

    rays: Count | None = key("Rays to trace; with `until` the default of rays_max.", None)
    until: UntilForm | None = key("Trace until a measure is known this well.", None)
    rays_max: Count | None = key("With `until`: end here at the latest.", None)
    events_max: EventCount = key("Most events of one ray.", 100_000)
    map_memory: Memory = key(
        'Memory for the batches of all maps, such as "2 GiB".', "2 GiB", validate_default=True
    )


class LimitForm(Form):
    """A bound on a measure."""

    model_config = ConfigDict(
        json_schema_extra={"anyOf": [{"required": ["at_least"]}, {"required": ["at_most"]}]}
    )

    measure: Text = key('A measure, such as "desk.uniformity" or "cover.absorbed".')
    at_least: Number | None = key("Lower bound, in the measure's unit.", None)
    at_most: Number | None = key("Upper bound, in the measure's unit.", None)
    note: Text = key("Why, for people.", "")


class LibraryForm(Form):
    """An included file."""

    study: LibraryStudyForm = key("The unit of length.", default_factory=LibraryStudyForm)
    medium: dict[str, MediumForm] = key("Media by name.", {})
    finish: dict[str, FinishForm] = key("Finishes by name.", {})
    part: tuple[PartForm, ...] = key("Parts.", ())
    source: tuple[SourceForm, ...] = key("Sources.", ())
    detector: tuple[DetectorForm, ...] = key("Detectors.", ())


class SceneForm(LibraryForm):
    """A study: parts, sources, detectors, and what is asked of them."""

    study: StudyForm = key("Title, unit of length, surroundings.", default_factory=StudyForm)
    trace: TraceForm = key("How many rays.", default_factory=TraceForm)
    limit: tuple[LimitForm, ...] = key("Bounds on measures.", ())
