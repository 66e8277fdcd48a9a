"""What a nameplate says about itself: speeds, poles, and fields that contradict each other."""

from __future__ import annotations

from calc.errors import RangeError


def synchronous_speed_rpm(*, frequency_hz: float, poles: int) -> float:
    r"""Return the speed of the stator's rotating field.

    Parameters
    ----------
    frequency_hz : float
        Supply frequency at the terminals. [Hz]
    poles : int
        Poles, not pole pairs. [1]

    Returns
    -------
    float
        Synchronous speed. [r/min]

    Raises
    ------
    RangeError
        If ``frequency_hz`` is not above zero, or ``poles`` is not 2, 4, 6, …

    Notes
    -----
    .. math:: n_s = 120\,f / p

    References
    ----------
    .. [1] A. E. Fitzgerald, C. Kingsley Jr. and S. D. Umans, "Electric
       Machinery", 6th ed. New York, NY, USA: McGraw-Hill, 2003, ch. 4.

    Examples
    --------
    >>> synchronous_speed_rpm(frequency_hz=60.0, poles=4)
    1800.0

    """
    if not frequency_hz > 0.0:  # also refuses nan
        raise RangeError("frequency_hz", frequency_hz, "above zero")
    if poles < 2 or poles % 2:
        raise RangeError("poles", poles, "2, 4, 6, … (a pole pair counts as two)")
    return 120.0 * frequency_hz / poles
