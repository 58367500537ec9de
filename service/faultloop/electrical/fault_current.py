"""Prospective currents from a measured loop, hot and cold."""

import numpy as np

from faultloop.electrical.measurement import Array, Interval, combined


def prospective_current(voltage_factor: Array, voltage_v: Array, impedance_ohm: Array) -> Array:
    """Current that a bolted fault drives through a loop.

    Parameters
    ----------
    voltage_factor : (n,) array
        c_min for the least, c_max for the greatest current [1].
    voltage_v : (n,) array
        Nominal voltage that drives the loop [V].
    impedance_ohm : (n,) array
        Loop impedance [Ω].

    Returns
    -------
    (n,) array
        I = c·U/Z [A]; inf where the loop may be zero (an open end), 0 where the loop is open (Z = inf),
        nan where it is unknown.

    References
    ----------
    .. [1] IEC 60364-4-41:2005, 411.4.4; IEC 60909-0:2016, Table 1 for c.
    """
    with np.errstate(divide="ignore", invalid="ignore"):
        return voltage_factor * voltage_v / np.maximum(impedance_ohm, 0.0)


def heated_loop(loop: Interval, heated_known: Array, external: Array, external_u: Array, factor: Array) -> Interval:
    """Loop impedance with its installation part at operating temperature.

    Parameters
    ----------
    loop : Interval
        Measured loop [Ω].
    heated_known : (n,) array
        R1 + R2 where known, else nan [Ω].
    external, external_u : (n,) array
        External loop and its expanded uncertainty where known, else nan [Ω].
    factor : (n,) array
        Temperature factor F [1].

    Returns
    -------
    Interval
        Z_hot = Z + (F - 1)·h, where the heated part h is R1 + R2 if known, else Z - Z_e, else Z, and
        never more than Z.  U_hot = F·U(Z), with (F - 1)·U(Z_e) added where Z_e splits the loop.

    Notes
    -----
    F multiplies the reading's whole uncertainty: a loop reading does not tell which part of its error
    lies in the part that is heated.

    References
    ----------
    .. [1] IEC 60364-6:2016, Annex D (rise of conductor resistance with temperature during a fault).
    """
    whole = np.where(np.isnan(external), loop.nominal, loop.nominal - external)
    heated = np.where(np.isnan(heated_known), whole, heated_known)
    heated = np.minimum(np.maximum(heated, 0.0), loop.nominal)
    nominal = loop.nominal + (factor - 1.0) * heated
    splits = np.isnan(heated_known) & ~np.isnan(external)
    share = np.where(splits, (factor - 1.0) * external_u, 0.0)
    above = combined(factor * (loop.greatest - loop.nominal), share)
    below = combined(factor * (loop.nominal - loop.least), share)
    return Interval(np.maximum(nominal - below, loop.least), nominal + above, nominal)
