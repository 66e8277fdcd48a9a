"""When a thermal overload relay trips: one time constant, heated by the square of the current."""

from __future__ import annotations

import math
from typing import Final

from calc.errors import RangeError

REFERENCE_MULTIPLE: Final = 7.2
"""Trip classes are defined at this multiple of the setting (IEC 60947-4-1)."""


def trip_time_s(
    *, multiple: float, threshold: float, time_at_reference_s: float, preload: float = 0.0
) -> float:
    r"""Return the time until a relay of one time constant trips at a constant current.

    Parameters
    ----------
    multiple : float
        Current over the relay's setting. [1]
    threshold : float
        Multiple of the setting at which the relay trips in the end; 1.05 to 1.2 in the standard. [1]
    time_at_reference_s : float
        Trip time from cold at 7.2 times the setting: what the trip class fixes. [s]
    preload : float
        Current before, over the setting, long enough to be warm; 0 is from cold. [1]

    Returns
    -------
    float
        Trip time; ``inf`` where the current is not above the threshold, 0 where the
        preload alone is. [s]

    Raises
    ------
    RangeError
        If a multiple is negative or not finite, the threshold is not between 0 and 7.2,
        or the time is not above zero.

    Notes
    -----
    .. math:: t = \tau \ln\frac{m^2 - p^2}{m^2 - k^2},\qquad
              \tau = t_{7.2} / \ln\frac{7.2^2}{7.2^2 - k^2}

    A bimetal is no exact first-order body; the standard fixes its times at 1.05, 1.2, 1.5
    and 7.2 times the setting only, and this curve joins them.

    References
    ----------
    .. [1] IEC 60255-149 (thermal electrical relays), the same curve, from memory.

    Examples
    --------
    >>> round(trip_time_s(multiple=7.2, threshold=1.2, time_at_reference_s=10.0), 6)
    10.0

    """
    if not 0.0 <= multiple < math.inf:
        raise RangeError("multiple", multiple, "zero or above, and finite")
    if not 0.0 <= preload < math.inf:
        raise RangeError("preload", preload, "zero or above, and finite")
    if not 0.0 < threshold < REFERENCE_MULTIPLE:
        raise RangeError("threshold", threshold, f"between 0 and {REFERENCE_MULTIPLE}")
    if not 0.0 < time_at_reference_s < math.inf:
        raise RangeError("time_at_reference_s", time_at_reference_s, "above zero")
    if multiple <= threshold:
        return math.inf
    if preload >= threshold:
        return 0.0
    constant_s = time_at_reference_s / -math.log1p(-((threshold / REFERENCE_MULTIPLE) ** 2))
    return constant_s * math.log((multiple**2 - preload**2) / (multiple**2 - threshold**2))
