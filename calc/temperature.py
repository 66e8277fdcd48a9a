"""Readings brought to one temperature: winding resistance and insulation resistance."""

from __future__ import annotations

import math
from typing import Final, Literal

from calc.errors import RangeError

Conductor = Literal["copper", "aluminium"]
System = Literal["thermoplastic", "thermoset"]

# Degrees below zero at which the resistance would vanish: IEC 60034-1 and 60034-2-1 (from memory).
INFERRED_ZERO_K: Final[dict[Conductor, float]] = {"copper": 235.0, "aluminium": 225.0}
# Winding temperatures between which the insulation laws hold (IEEE 43-2013; from memory).
INSULATION_RANGE_C: Final = (10.0, 85.0)


def winding_resistance_at(
    *, resistance_ohm: float, measured_c: float, wanted_c: float, conductor: Conductor = "copper"
) -> float:
    r"""Return what a winding would read at another temperature.

    Parameters
    ----------
    resistance_ohm : float
        Resistance as read. [ohm]
    measured_c : float
        Winding temperature at the reading. [degC]
    wanted_c : float
        Winding temperature to correct to. [degC]
    conductor : str
        copper or aluminium.

    Returns
    -------
    float
        Resistance at ``wanted_c``; ``inf`` (open) stays ``inf``. [ohm]

    Raises
    ------
    RangeError
        If the resistance is negative, a temperature is not above the inferred zero,
        or the conductor is another.

    Notes
    -----
    .. math:: R_2 = R_1 \frac{k + \theta_2}{k + \theta_1}

    with k = 235 for copper, 225 for aluminium. IEEE 112 uses 234.5 for copper, which
    differs by 0.04 % between 20 and 75 degC.

    References
    ----------
    .. [1] IEC 60034-2-1 (from memory).

    Examples
    --------
    >>> round(winding_resistance_at(resistance_ohm=1.0, measured_c=20.0, wanted_c=75.0), 4)
    1.2157

    """
    k = _inferred_zero(conductor)
    _at_least_zero("resistance_ohm", resistance_ohm)
    for name, temperature_c in (("measured_c", measured_c), ("wanted_c", wanted_c)):
        if not temperature_c > -k:
            raise RangeError(name, temperature_c, f"above {-k:g} degC")
    return resistance_ohm * (k + wanted_c) / (k + measured_c)


def insulation_system(insulation_class: str | None) -> System | None:
    """Return the kind of insulation that goes with a thermal class, None where the class does not tell.

    Parameters
    ----------
    insulation_class : str or None
        Y, A, E, B, F, H, N or R.

    Returns
    -------
    str or None
        ``thermoset`` for B, F, H and above, ``thermoplastic`` for the older Y, A, E (common practice).

    """
    if insulation_class in {"B", "F", "H", "N", "R"}:
        return "thermoset"
    return "thermoplastic" if insulation_class in {"Y", "A", "E"} else None


def insulation_at_40_c(
    *, insulation_ohm: float, winding_c: float, system: System | None = None
) -> float | None:
    r"""Return the insulation resistance that a winding would show at 40 degC.

    Parameters
    ----------
    insulation_ohm : float
        One-minute reading. [ohm]
    winding_c : float
        Winding temperature at the reading. [degC]
    system : str or None
        ``thermoplastic`` (and older), ``thermoset``, or None where nobody knows.

    Returns
    -------
    float or None
        Resistance at 40 degC; the lower of both laws where the system is unknown;
        None outside 10 to 85 degC, where neither law holds. [ohm]

    Raises
    ------
    RangeError
        If ``insulation_ohm`` is negative or the system is another.

    Notes
    -----
    Thermoplastic: halving for every 10 K [1]_. Thermosetting [2]_:

    .. math:: K_T = \exp\left[-B\left(\frac{1}{T + 273} - \frac{1}{313}\right)\right]

    with B = 4230 K from 40 to 85 degC and 1245 K from 10 to 40 degC. At 80 degC the two
    differ by sixteen to four and a half, so the wrong one passes a bad winding. Neither
    holds below the dew point, whatever the temperature.

    References
    ----------
    .. [1] IEEE 43, older insulation (looked up).
    .. [2] IEEE 43-2013, thermosetting insulation (from memory).

    Examples
    --------
    >>> insulation_at_40_c(insulation_ohm=200e6, winding_c=20.0, system="thermoplastic")
    50000000.0

    """
    _at_least_zero("insulation_ohm", insulation_ohm)
    if system not in {None, "thermoplastic", "thermoset"}:
        raise RangeError("system", system, "thermoplastic, thermoset or None")
    if not INSULATION_RANGE_C[0] <= winding_c <= INSULATION_RANGE_C[1]:
        return None
    by_halving = float(0.5 ** ((40.0 - winding_c) / 10.0))
    b_k = 4230.0 if winding_c >= 40.0 else 1245.0
    by_thermoset = math.exp(-b_k * (1.0 / (winding_c + 273.0) - 1.0 / 313.0))
    if system is None:
        return insulation_ohm * min(by_halving, by_thermoset)
    return insulation_ohm * (by_thermoset if system == "thermoset" else by_halving)


def _inferred_zero(conductor: Conductor) -> float:
    if conductor not in INFERRED_ZERO_K:
        raise RangeError("conductor", conductor, "copper or aluminium")
    return INFERRED_ZERO_K[conductor]


def _at_least_zero(name: str, value: float) -> None:
    if not value >= 0.0:  # also refuses nan
        raise RangeError(name, value, "zero or more")
