"""[[source]] tables -> sources: every name resolved, every length in the study's unit."""

from collections.abc import Mapping

from lumentrace.errors import nearest
from lumentrace.photometry import FIRST_NM, LAST_NM, luminosity
from lumentrace.scene.forms import PATTERNS, FluxForm, PatternForm, SourceForm
from lumentrace.scene.model import (
    Disc,
    Faces,
    Flux,
    Part,
    Pattern,
    Point,
    Rectangle,
    Source,
)
from lumentrace.scene.place import Place
from lumentrace.scene.vectors import check_frame, scaled, turns, unit

SHAPES = ("faces", "point", "disc", "rectangle")
_FLUX = ("watts", "lumens", "irradiance")


def source_of(form: SourceForm, place: Place, parts: Mapping[str, Part], scale: float) -> Source:
    """The source that a [[source]] table describes. Raises UserError."""
    shape = _one_of(form, SHAPES, "", place)
    return Source(
        name=form.name,
        shape=_shape(form, shape, place, parts, scale),
        flux=_flux(form.flux, shape, form.spectrum.line, place),
        pattern=_pattern(form, shape, place),
        wavelength=form.spectrum.line,
        group=form.group or form.name,
        share=form.share,
        turn=turns(form.turn),
        at=scaled(form.at, scale),
        use=form.use,
        place=place,
    )


def _one_of(form, keys: tuple[str, ...], key: str, place: Place) -> str:
    """The one of the keys that is given. Raises UserError for none and for several."""
    given = [name for name in keys if getattr(form, name) is not None]
    if len(given) == 1:
        return given[0]
    found = f"found {' and '.join(given)}" if given else "found none"
    raise place.error(key, f"{found}; one of {', '.join(keys)} is needed")


def _shape(
    form: SourceForm, shape: str, place: Place, parts: Mapping[str, Part], scale: float
) -> Point | Faces | Disc | Rectangle:
    if shape == "faces":
        return _faces(form, place, parts)
    if shape == "point":
        return Point(scaled(form.point, scale))
    if shape == "disc":
        disc = form.disc
        return Disc(scaled(disc.center, scale), unit(disc.normal), disc.radius * scale)
    plane = form.rectangle
    check_frame(plane.normal, plane.across, place, "rectangle.across")
    return Rectangle(
        scaled(plane.center, scale),
        unit(plane.normal),
        unit(plane.across),
        scaled(plane.size, scale),
    )


def _faces(form: SourceForm, place: Place, parts: Mapping[str, Part]) -> Faces:
    name = form.faces.part
    if name not in parts:
        raise place.error("faces.part", f'no part is named "{name}"; {nearest(name, parts)}')
    if form.use and not parts[name].use:
        raise place.error("faces.part", f'the part "{name}" is left out (use = false)')
    for key in ("turn", "at"):
        if key in form.model_fields_set:
            raise place.error(key, f'its faces stand where the part "{name}" does; move the part')
    return Faces(name, form.faces.tag)


def _flux(form: FluxForm, shape: str, wavelength: float, place: Place) -> Flux:
    kind = _one_of(form, _FLUX, "flux", place)
    if kind == "irradiance" and shape not in ("disc", "rectangle"):
        raise place.error("flux.irradiance", f"is for a disc or a rectangle, not for {shape}")
    if form.each and shape != "faces":
        raise place.error("flux.each", f"is for faces of a part, not for a {shape}")
    if kind == "lumens" and luminosity(wavelength) == 0:
        raise place.error(
            "flux.lumens",
            f"light of {wavelength:g} nm is invisible and has no lumens (visible: {FIRST_NM} to "
            f"{LAST_NM} nm); give watts",
        )
    return Flux(kind, getattr(form, kind), form.each)


def _pattern(form: SourceForm, shape: str, place: Place) -> Pattern:
    written = form.pattern
    if shape == "point" and written not in (None, "isotropic"):
        raise place.error("pattern", 'a point has no normal; its pattern is "isotropic"')
    if shape == "faces" and written == "isotropic":
        raise place.error(
            "pattern",
            '"isotropic" would shine into the part; over the half space before its faces it is '
            "{ cosine_power = 0 }",
        )
    if written is None and shape != "point":
        raise place.error("pattern", f"is missing; allowed: {PATTERNS}")
    if isinstance(written, PatternForm):
        kind = _one_of(written, ("cosine_power", "collimated"), "pattern", place)
        return Pattern(kind, getattr(written, kind))
    return Pattern(written or "isotropic", 0.0)
