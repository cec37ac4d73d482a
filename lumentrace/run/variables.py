"""Every variable and attribute of a result, declared once: the writer, the check on opening and the
documentation read these lists.

All values are estimates of the whole study, in the units that emitted flux has: a value along
`batch` is what that batch alone would report, the run's estimate is the mean over the 64 batches.
Squares are scaled alike, so that (mean over batches)^2 / square is the effective number.
"""

from typing import NamedTuple

import numpy as np

LAYOUT = 1  # of the file; raised when an older reader would misread it
FATES = ("detected", "escaped", "cut_off", "unresolved", "sampling")  # order of the account's end
HALVES = ("even", "odd")
SURROUNDINGS = "surroundings"  # row of volume after those of the parts
DETECTOR = "detectors/*"  # stands for the node of each detector


class Variable(NamedTuple):
    node: str
    name: str
    dims: tuple[str, ...]
    dtype: str  # "str", or numpy's name
    unit: str  # {length}, {flux} and {map} are filled in; "": none, or told by another variable
    meaning: str
    optional: bool = False


class Attribute(NamedTuple):
    node: str
    name: str
    meaning: str


def _labels(node: str, *names: str) -> tuple[Variable, ...]:
    """Tables of names: variables `*_id` of the node are rows of them."""
    return tuple(Variable(node, n, (n,), "str", "", f"names, row by row: {n}") for n in names)


_PASSES = ("detector", "group", "batch")

VARIABLES = (
    *_labels("sources", "source", "group"),
    Variable("sources", "group_id", ("source",), "int32", "", "row of group"),
    Variable("sources", "wavelength", ("source",), "float64", "nm", "wavelength in vacuum"),
    Variable("sources", "flux", ("source",), "float64", "W", "flux over all copies"),
    Variable("sources", "ray_flux", ("source",), "float64", "W",
             "flux with which a ray starts, for one block"),
    Variable("sources", "efficacy", ("source",), "float64", "lm/W", "683 lm/W V(wavelength)"),

    *_labels(DETECTOR, "group", "half"),
    Variable(DETECTOR, "across", ("across",), "float64", "{length}",
             "centres of the cells along across, from the plane's centre"),
    Variable(DETECTOR, "up", ("up",), "float64", "{length}",
             "centres of the cells along normal x across, from the plane's centre"),
    Variable(DETECTOR, "value", ("up", "across"), "float64", "{map}", "flux on the cell per area"),
    Variable(DETECTOR, "error", ("up", "across"), "float64", "{map}",
             "standard error of value; NaN where nothing was counted"),
    Variable(DETECTOR, "effective", ("up", "across"), "float64", "1",
             "effective number of contributions, (sum w)^2 / sum w^2 over rays"),
    Variable(DETECTOR, "flux", ("group", "batch"), "float64", "{flux}", "flux on the detector"),
    Variable(DETECTOR, "flux_square", ("group",), "float64", "{flux}2",
             "sum over rays of (the ray's total / blocks)^2"),
    Variable(DETECTOR, "flux_count", ("group",), "int64", "1", "arrivals"),
    Variable(DETECTOR, "cell_half", ("half", "group", "up", "across"), "float64", "{flux}",
             "flux on the cell, from the even and from the odd batches"),
    Variable(DETECTOR, "cell_square", ("group", "up", "across"), "float64", "{flux}2",
             "sum over rays of (the ray's total in the cell / blocks)^2"),
    Variable(DETECTOR, "cell_batch", ("group", "up", "across", "batch"), "float64", "{flux}",
             "flux on the cell; kept where it fits map_memory", optional=True),
    Variable(DETECTOR, "cell_block_square", ("half", "group", "up", "across"), "float64",
             "{flux}2", "mean over the blocks of (the block's estimate)^2, from the even and from "
             "the odd batches; kept where cell_batch is not",
             optional=True),

    *_labels("account", "group", "tag", "part", "volume", "fate"),
    Variable("account", "filled", ("volume",), "int8", "1",
             "1: a part that a medium fills, or surroundings that absorb"),
    Variable("account", "emitted", ("group",), "float64", "W", "emitted flux, not sampled"),
    Variable("account", "absorbed", ("group", "tag", "batch"), "float64", "W",
             "absorbed at the faces of the tag"),
    Variable("account", "absorbed_square", ("group", "tag"), "float64", "W2",
             "sum over rays of (the ray's total / blocks)^2"),
    Variable("account", "bulk", ("group", "volume", "batch"), "float64", "W",
             "absorbed in the medium of the part, or around all parts"),
    Variable("account", "bulk_square", ("group", "volume"), "float64", "W2",
             "sum over rays of (the ray's total / blocks)^2"),
    Variable("account", "whole", ("group", "part", "batch"), "float64", "W",
             "absorbed by the part: its tags and its medium together"),
    Variable("account", "whole_square", ("group", "part"), "float64", "W2",
             "sum over rays of (the ray's total / blocks)^2"),
    Variable("account", "ended", ("group", "fate", "batch"), "float64", "W",
             "what was not absorbed; sampling is signed, with mean zero"),
    Variable("account", "ended_square", ("group", "fate"), "float64", "W2",
             "sum over rays of (the ray's total / blocks)^2"),

    *_labels("ledger", "detector", "source", "group", "tag", "event"),
    Variable("ledger", "flux_unit", ("detector",), "str", "", "unit of flux and other there"),
    Variable("ledger", "detector_id", ("path",), "int32", "", "row of detector"),
    Variable("ledger", "source_id", ("path",), "int32", "", "row of source"),
    Variable("ledger", "hash", ("path",), "uint64", "", "what the engine calls the path"),
    Variable("ledger", "n_steps", ("path",), "int32", "1", "steps of the path"),
    Variable("ledger", "step_tag_id", ("path", "step"), "int32", "",
             "row of tag; -1 beyond the path's end"),
    Variable("ledger", "step_event_id", ("path", "step"), "int8", "",
             "row of event; -1 beyond the path's end"),
    Variable("ledger", "step_run", ("path", "step"), "int8", "1",
             "times that the event follows itself there: 1, 2, 3 (3 or more); 0 beyond the end"),
    Variable("ledger", "run_mean", ("path", "step"), "float64", "1",
             "mean of the true number of times; NaN beyond the path's end"),
    Variable("ledger", "flux", ("path", "batch"), "float64", "{flux}", "flux by this path"),
    Variable("ledger", "square", ("path",), "float64", "{flux}2",
             "sum over rays of (the ray's total / blocks)^2"),
    Variable("ledger", "count", ("path",), "int64", "1", "arrivals, branches counted singly"),
    Variable("ledger", "optical_length", ("path",), "float64", "{length}",
             "mean of index x length, index relative to air"),
    Variable("ledger", "group_length", ("path",), "float64", "{length}",
             "mean of group index x length, index relative to air"),
    Variable("ledger", "reflections", ("path",), "float64", "1", "mean number of `reflect`"),
    Variable("ledger", "scatters", ("path",), "float64", "1",
             "mean number of `scatter` and `scatter_through`"),
    Variable("ledger", "ray", ("path", "kept"), "int64", "1",
             "numbers of the first rays on this path; -1: none"),
    Variable("ledger", "other", ("detector", "group", "batch"), "float64", "{flux}",
             "flux by paths that are not kept"),
    Variable("ledger", "other_count", ("detector", "group"), "int64", "1", "their arrivals"),

    *_labels("what_if", "detector", "group", "tag", "part", "event"),
    Variable("what_if", "passes", ("passes",), "int32", "1",
             "number of events there on the whole path; the last stands for that many or more"),
    Variable("what_if", "by_lobe", (*_PASSES, "tag", "event", "passes"), "float64", "{flux}",
             "flux that met the event at the tag so often"),
    Variable("what_if", "by_lobe_beyond", (*_PASSES, "tag", "event"), "float64", "{flux}",
             "flux x number of events, of the last of passes"),
    Variable("what_if", "by_tag", (*_PASSES, "tag", "passes"), "float64", "{flux}",
             "flux that met the tag so often, all events but through and bulk"),
    Variable("what_if", "by_tag_beyond", (*_PASSES, "tag"), "float64", "{flux}",
             "flux x number of events, of the last of passes"),
    Variable("what_if", "by_part", (*_PASSES, "part", "passes"), "float64", "{flux}",
             "flux that met the part so often, all events but through and bulk"),
    Variable("what_if", "by_part_beyond", (*_PASSES, "part"), "float64", "{flux}",
             "flux x number of events, of the last of passes"),

    *_labels("lost", "tag", "reason"),
    Variable("lost", "ray", ("lost",), "int64", "1", "ray number"),
    Variable("lost", "reason_id", ("lost",), "int32", "", "row of reason"),
    Variable("lost", "weight", ("lost",), "float64", "W", "flux that the ray still carried"),
    Variable("lost", "x", ("lost",), "float64", "{length}", "where"),
    Variable("lost", "y", ("lost",), "float64", "{length}", "where"),
    Variable("lost", "z", ("lost",), "float64", "{length}", "where"),
    Variable("lost", "tag_id", ("lost",), "int32", "", "row of tag; -1: none"),
)  # fmt: skip

ATTRIBUTES = (
    Attribute("/", "title", "title of the study"),
    Attribute("/", "lumentrace", "version of lumentrace"),
    Attribute("/", "layout", "version of this layout"),
    Attribute("/", "scene", "name of the scene file"),
    Attribute("/", "scene_digest", "sha256 over the bytes of the scene file and its includes"),
    Attribute("/", "mesh_digests", "JSON: sha256 of the mesh file by part"),
    Attribute("/", "limits", "JSON: the limits of the scene file, in its order"),
    Attribute("/", "seed", "seed of the random numbers"),
    Attribute("/", "rays", "rays traced"),
    Attribute("/", "rounds", "rounds of 64 blocks of 1024 rays"),
    Attribute("/", "events_max", "events after which a ray is cut off"),
    Attribute("/", "length", "unit of all lengths"),
    Attribute("/", "metre", "metres in one unit of length"),
    Attribute("/", "lost_count", "rays cut off or unresolved, kept in /lost or not"),
    Attribute(DETECTOR, "counts", "illuminance or irradiance"),
    Attribute(DETECTOR, "side", "front: light against the normal counts; or both"),
    Attribute(DETECTOR, "catches", "1: light that is counted ends here"),
    Attribute(DETECTOR, "center", "of the plane, scene's frame, unit of length"),
    Attribute(DETECTOR, "normal", "unit vector"),
    Attribute(DETECTOR, "across_direction", "unit vector"),
    Attribute(DETECTOR, "up_direction", "unit vector, normal x across"),
    Attribute(DETECTOR, "size", "along across and along up, unit of length"),
    Attribute(DETECTOR, "area", "m2"),
    Attribute(DETECTOR, "cell_area", "m2"),
    Attribute(DETECTOR, "flux_unit", "unit of flux here"),
    Attribute(DETECTOR, "map_unit", "unit of value here"),
    Attribute(DETECTOR, "arrivals_most", "most arrivals of one ray"),
    Attribute(DETECTOR, "cell_arrivals_most", "most arrivals of one ray in one cell"),
)


def declared(node: str) -> tuple[Variable, ...]:
    """The variables of a node, given as "account" or DETECTOR."""
    return tuple(v for v in VARIABLES if v.node == node)


def matches(variable: Variable, array) -> bool:
    """Whether a labelled array has the declared dimensions and kind of number."""
    if variable.dtype == "str":
        return tuple(array.dims) == variable.dims and array.dtype.kind in "UOT"
    return tuple(array.dims) == variable.dims and array.dtype == np.dtype(variable.dtype)


def faults(nodes: dict[str, tuple[dict, dict]]) -> list[str]:
    """What a result lacks or holds otherwise than declared; an empty list for a sound one.

    nodes: by path without the leading slash ("" is the root, "detectors/desk" a detector), its
    attributes and its variables.
    """
    found = []
    named = {path: DETECTOR if path.startswith("detectors/") else path for path in nodes}
    for node in {v.node: None for v in VARIABLES}:
        if node != DETECTOR and node not in nodes:
            found.append(f"lacks {node}")
    for path, (attributes, arrays) in nodes.items():
        for a in ATTRIBUTES:
            if a.node.strip("/") == named[path] and a.name not in attributes:
                found.append(f"lacks the attribute {path}/{a.name}")
        for v in declared(named[path]):
            if v.name not in arrays:
                if not v.optional:
                    found.append(f"lacks {path}/{v.name}")
            elif not matches(v, arrays[v.name]):
                found.append(f"{path}/{v.name} is not as declared")
    return found


def as_markdown() -> str:
    """The declaration as tables, for the documentation."""
    lines = []
    for node in ["/", *{v.node: None for v in VARIABLES}]:
        shown = node if node == "/" else "/" + node.replace("*", "NAME")
        lines += [f"`{shown}`", "", "| name | over | unit | meaning |", "| --- | --- | --- | --- |"]
        for a in ATTRIBUTES:
            if a.node == node:
                lines.append(f"| {a.name} (attribute) | | | {a.meaning} |")
        for v in declared(node):
            lines.append(f"| {v.name} | {', '.join(v.dims)} | {v.unit} | {v.meaning} |")
        lines.append("")
    return "\n".join(lines)
