"""Counter-based random numbers: Philox4x64-10.

Salmon, Moraes, Dror, Shaw: "Parallel random numbers: as easy as 1, 2, 3", SC11 (2011), section 3
and table 2. A number depends on its key and counter alone, so that nothing depends on threads, on
order or on other sources, and any ray can be traced again.
"""

import numpy as np
from llvmlite import ir
from numba.core import types
from numba.extending import intrinsic

from lumentrace.jit import kernel

_MULTIPLIER_0 = np.uint64(0xD2E7470EE14C6C93)
_MULTIPLIER_1 = np.uint64(0xCA5A826395121157)
_WEYL_0 = np.uint64(0x9E3779B97F4A7C15)  # golden ratio
_WEYL_1 = np.uint64(0xBB67AE8584CAA73B)  # sqrt(3) - 1

# What the numbers are drawn for; part of the counter, so that purposes never share numbers.
PLACE, DIRECTION, SURFACE, LOBE = range(4)


@intrinsic
def _multiply_high(typing_context, a, b):
    """Upper 64 bits of the 128-bit product; numba has no 128-bit integers."""

    def generate(context, builder, signature, args):
        wide = ir.IntType(128)
        product = builder.mul(builder.zext(args[0], wide), builder.zext(args[1], wide))
        return builder.trunc(builder.lshr(product, ir.Constant(wide, 64)), ir.IntType(64))

    return types.uint64(types.uint64, types.uint64), generate


@kernel
def philox(key_0, key_1, counter_0, counter_1, counter_2, counter_3):
    """Ten rounds of Philox4x64: four uint64 from a key of two and a counter of four uint64."""
    for _ in range(10):
        high_0 = _multiply_high(_MULTIPLIER_0, counter_0)
        low_0 = _MULTIPLIER_0 * counter_0
        high_1 = _multiply_high(_MULTIPLIER_1, counter_2)
        low_1 = _MULTIPLIER_1 * counter_2
        counter_0 = high_1 ^ counter_1 ^ key_0
        counter_1 = low_1
        counter_2 = high_0 ^ counter_3 ^ key_1
        counter_3 = low_0
        key_0 += _WEYL_0
        key_1 += _WEYL_1
    return counter_0, counter_1, counter_2, counter_3


@kernel
def uniform(bits):
    """float64 in [0, 1) from the upper 53 of 64 bits."""
    return (bits >> np.uint64(11)) * (1.0 / 9007199254740992.0)


@kernel
def uniforms(seed, source_key, ray, branch, event, purpose):
    """Four float64 in [0, 1) for one purpose at one event of one branch of one ray of a source.

    seed, source_key: uint64, the key. ray: int64, the ray's number within its source.
    """
    a, b, c, d = philox(
        np.uint64(seed),
        np.uint64(source_key),
        np.uint64(ray),
        np.uint64(branch),
        np.uint64(event),
        np.uint64(purpose),
    )
    return uniform(a), uniform(b), uniform(c), uniform(d)
