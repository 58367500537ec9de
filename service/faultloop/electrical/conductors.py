"""Resistance of conductors, its change with temperature, and adiabatic heating."""

import numpy as np

from faultloop.electrical.measurement import Array

# Between these times heating is adiabatic (IEC 60364-4-43, 434.5.2); below, let-through energy decides.
ADIABATIC_FROM_S, ADIABATIC_TO_S = 0.1, 5.0


def temperature_factor(operating_c: Array, test_c: Array, alpha_20: Array) -> Array:
    """Factor by which a conductor's resistance grows from test to operating temperature.

    Parameters
    ----------
    operating_c : (n,) array
        Conductor temperature in service [°C].
    test_c : (n,) array
        Conductor temperature when measured [°C].
    alpha_20 : (n,) array
        Temperature coefficient of resistance at 20 °C [1/K].

    Returns
    -------
    (n,) array
        F = [1 + α20(θ_op - 20)] / [1 + α20(θ_test - 20)], never below 1: a circuit tested warmer than
        its service temperature is not credited with cooling.

    References
    ----------
    .. [1] IEC 60228:2004, Annex B (conversion to and from 20 °C).
    """
    factor = (1.0 + alpha_20 * (operating_c - 20.0)) / (1.0 + alpha_20 * (test_c - 20.0))
    return np.maximum(factor, 1.0)


def resistance(ohm_per_km: Array, length_m: Array) -> Array:
    """Resistance at 20 °C of one conductor.

    Parameters
    ----------
    ohm_per_km : (n,) array
        Greatest resistance per length at 20 °C [Ω/km].
    length_m : (n,) array
        Length [m].

    Returns
    -------
    (n,) array
        R = r·l/1000 [Ω]; nan where either is unknown.

    References
    ----------
    .. [1] IEC 60228:2004, Tables 1 to 3.
    """
    return ohm_per_km * length_m / 1000.0


def withstand_time(k: Array, area_mm2: Array, current_a: Array) -> Array:
    """Longest time for which a conductor bears a current, heated adiabatically.

    Parameters
    ----------
    k : (n,) array
        Material and insulation factor [A·s^½/mm²].
    area_mm2 : (n,) array
        Cross-sectional area [mm²].
    current_a : (n,) array
        Fault current, r.m.s. [A].

    Returns
    -------
    (n,) array
        t = (k·S/I)² [s]; inf where no current flows, nan where an input is unknown.

    Notes
    -----
    Holds for 0.1 s to 5 s; below that let-through energy decides.

    References
    ----------
    .. [1] IEC 60364-4-43:2008, 434.5.2.
    """
    with np.errstate(divide="ignore", invalid="ignore"):
        ratio = k * area_mm2 / current_a
    return ratio * ratio


def adiabatic_area(k: Array, current_a: Array, time_s: Array) -> Array:
    """Least cross-sectional area that bears a current for a time.

    Parameters
    ----------
    k : (n,) array
        Material and insulation factor [A·s^½/mm²].
    current_a : (n,) array
        Fault current, r.m.s. [A].
    time_s : (n,) array
        Disconnection time [s].

    Returns
    -------
    (n,) array
        S = I·√t/k [mm²].

    References
    ----------
    .. [1] IEC 60364-5-54:2011, 543.1.2.
    """
    return current_a * np.sqrt(time_s) / k


def let_through_area(k: Array, energy_a2s: Array) -> Array:
    """Least cross-sectional area that bears a let-through energy.

    Parameters
    ----------
    k : (n,) array
        Material and insulation factor [A·s^½/mm²].
    energy_a2s : (..., n) array
        Let-through energy I²t [A²s].

    Returns
    -------
    (..., n) array
        S = √(I²t)/k [mm²]; inf for an unbounded energy, nan where an input is unknown.

    References
    ----------
    .. [1] IEC 60364-5-54:2011, 543.1.2.
    """
    return np.sqrt(energy_a2s) / k
