"""What can happen to light at a surface or in a medium.

The order is stored in files: only append. An event is also the lobe that what-if sums tell apart.
"""

EVENTS = ("through", "reflect", "total", "mirror", "scatter", "scatter_through", "bulk")
THROUGH, REFLECT, TOTAL, MIRROR, SCATTER, SCATTER_THROUGH, BULK = range(len(EVENTS))

ARRIVED = -1  # a medium let the ray through to the end of its segment
