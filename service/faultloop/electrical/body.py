"""Body current, set against a current-time limit, to order work by severity; and the energy that capacitors keep."""

import numpy as np

from faultloop.electrical.measurement import Array


def severity_ratio(touch_voltage_v: Array, body_ohm: Array, time_s: Array) -> Array:
    """Body current as a multiple of the current that the fibrillation curve allows for that time.

    Parameters
    ----------
    touch_voltage_v : (n,) array
        Prospective touch voltage [V].
    body_ohm : (n,) array
        Body resistance taken for ordering [Ω].
    time_s : (n,) array
        Time for which the current flows [s]; inf where nothing interrupts it.

    Returns
    -------
    (n,) array
        (U_t/R_b) / (0.116/√t), with t clamped to 0.03 to 3 s; nan where the voltage is unknown.

    Notes
    -----
    For ordering work only; it permits nothing.

    References
    ----------
    .. [1] IEEE Std 80-2013, 8.3, eq. 29 (body of 50 kg).
    """
    time = np.minimum(np.maximum(time_s, 0.03), 3.0)
    return (touch_voltage_v / body_ohm) / (0.116 / np.sqrt(time))


def touch_voltage(voltage_v: Array, protective_ohm: Array, loop_ohm: Array) -> Array:
    """Share of the voltage that stands between exposed parts and the earthing terminal during a fault.

    Parameters
    ----------
    voltage_v : (n,) array
        Nominal voltage to earth [V].
    protective_ohm : (n,) array
        Protective path from exposed part to the reference, hot [Ω].
    loop_ohm : (n,) array
        Whole loop, hot [Ω].

    Returns
    -------
    (n,) array
        U_t = U0·R_PE/Z, at most U0; U0 where the loop is open.

    References
    ----------
    .. [1] IEC 60364-4-41:2005, 411.3.2 (protective conductor's share of the loop).
    """
    with np.errstate(divide="ignore", invalid="ignore"):
        share = protective_ohm / loop_ohm
    share = np.where(np.isinf(loop_ohm), 1.0, share)
    return voltage_v * np.minimum(share, 1.0)


def stored_energy(capacitance_uf: Array, voltage_v: Array) -> Array:
    """Energy in a charged capacitor.

    Parameters
    ----------
    capacitance_uf : (n,) array
        Capacitance [µF].
    voltage_v : (n,) array
        Voltage over it [V].

    Returns
    -------
    (n,) array
        E = C·U²/2 [J].

    References
    ----------
    .. [1] IEC 60050-131:2002, 131-12-13 (capacitance).
    """
    return 0.5e-6 * capacitance_uf * voltage_v * voltage_v


def discharge_time(capacitance_uf: Array, voltage_v: Array, resistance_ohm: Array, to_v: Array) -> Array:
    """Time in which a capacitor falls to a voltage through a resistance.

    Parameters
    ----------
    capacitance_uf : (n,) array
        Capacitance [µF].
    voltage_v : (n,) array
        Voltage at the beginning [V].
    resistance_ohm : (n,) array
        Resistance that discharges it [Ω]; inf where there is none.
    to_v : (n,) array
        Voltage to be reached [V].

    Returns
    -------
    (n,) array
        t = R·C·ln(U/U_to) [s]; 0 where it is there already, inf without a resistance, nan where an input is unknown.

    References
    ----------
    .. [1] IEC 60050-131:2002, 131-11-26 (time constant).
    """
    with np.errstate(divide="ignore", invalid="ignore"):
        falls = resistance_ohm * (capacitance_uf * 1e-6) * np.log(voltage_v / to_v)
    return np.where(voltage_v <= to_v, np.where(np.isnan(capacitance_uf), np.nan, 0.0), falls)
