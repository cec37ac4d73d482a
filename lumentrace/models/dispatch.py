"""Choosing among models inside compiled code: a ladder of ifs, made from the registry.

Numba compiles such a ladder as if it were written by hand; closures or tuples of functions are
several times slower. It is made from text, once, here; `ladder_text` shows it. Numba cannot cache a
function made from text, but caches its callers with it inside.
"""

import inspect

from lumentrace.jit import uncached_kernel
from lumentrace.models.registry import DETECTORS, LOBES, MEDIA, PATTERNS, STARTS


def ladder_text(models, function: str) -> str:
    """Source of a function that calls `function` of the model numbered by its first argument."""
    parameters = ", ".join(inspect.signature(getattr(models[0], function).py_func).parameters)
    lines = [f"def {function}(kind, {parameters}):"]
    for i in range(len(models) - 1):
        lines += [f"    if kind == {i}:", f"        return model_{i}({parameters})"]
    lines.append(f"    return model_{len(models) - 1}({parameters})")
    return "\n".join(lines)


def _ladder(models, function: str):
    namespace = {f"model_{i}": getattr(model, function) for i, model in enumerate(models)}
    exec(ladder_text(models, function), namespace)
    return uncached_kernel(namespace[function])


lobe_sample = _ladder(LOBES, "sample")
lobe_albedo = _ladder(LOBES, "albedo")
pattern_emit = _ladder(PATTERNS, "emit")
start_of = _ladder(STARTS, "start")
medium_index = _ladder(MEDIA, "index")
medium_advance = _ladder(MEDIA, "advance")
detector_intersect = _ladder(DETECTORS, "intersect")
detector_bin_of = _ladder(DETECTORS, "bin_of")
