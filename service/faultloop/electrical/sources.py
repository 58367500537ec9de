"""Source impedance of a transformer, and what its ratio does to voltages and currents."""

import numpy as np

from faultloop.electrical.measurement import Array


def transformer_impedance(rated_power_va: Array, voltage_v: Array, short_circuit_percent: Array) -> Array:
    """Impedance of a transformer seen from one of its windings.

    Parameters
    ----------
    rated_power_va : (n,) array
        Rated power S [VA].
    voltage_v : (n,) array
        Rated voltage U of that winding [V].
    short_circuit_percent : (n,) array
        Short-circuit voltage u_k [% of the rated voltage].

    Returns
    -------
    (n,) array
        Z = u_k/100·U²/S [Ω]; nan where an input is unknown, inf where the rated power is zero.

    References
    ----------
    .. [1] IEC 60909-0:2016, 6.3.1, eq. 7.
    """
    with np.errstate(divide="ignore", invalid="ignore"):
        return short_circuit_percent / 100.0 * voltage_v * voltage_v / rated_power_va


def rated_current(rated_power_va: Array, voltage_v: Array) -> Array:
    """Rated current of a winding of a single-phase transformer.

    Parameters
    ----------
    rated_power_va : (n,) array
        Rated power S [VA].
    voltage_v : (n,) array
        Rated voltage of the winding [V].

    Returns
    -------
    (n,) array
        I = S/U [A].

    References
    ----------
    .. [1] IEC 60076-1:2011, 3.4.7 (rated current).
    """
    with np.errstate(divide="ignore", invalid="ignore"):
        return rated_power_va / voltage_v


def reflected_current(secondary_a: Array, primary_v: Array, secondary_v: Array) -> Array:
    """Current that a secondary current asks of the primary, without the magnetising current.

    Parameters
    ----------
    secondary_a : (n,) array
        Secondary current [A].
    primary_v, secondary_v : (n,) array
        Rated voltages, which stand as the turns do [V].

    Returns
    -------
    (n,) array
        I_1 = I_2·U_2/U_1 [A].

    References
    ----------
    .. [1] IEC 60050-131:2002, 131-12-78 (ideal transformer).
    """
    with np.errstate(divide="ignore", invalid="ignore"):
        return secondary_a * secondary_v / primary_v


def regulation(short_circuit_percent: Array, resistive_percent: Array, power_factor: Array) -> Array:
    """Fall of the secondary voltage from no load to rated load.

    Parameters
    ----------
    short_circuit_percent : (n,) array
        Short-circuit voltage u_k [%].
    resistive_percent : (n,) array
        Its resistive part u_R, the load loss over the rated power [%].
    power_factor : (n,) array
        cos φ of the load, lagging [1].

    Returns
    -------
    (n,) array
        ε = u_R·cos φ + u_X·sin φ + (u_X·cos φ - u_R·sin φ)²/200 [%]; nan where u_R exceeds u_k by more than rounding.

    References
    ----------
    .. [1] IEC 60076-8:1997, 8.1 (voltage drop for a load condition).
    """
    with np.errstate(invalid="ignore"):
        # All resistance, as in small transformers: the last figure of a quotient must not make it unknown.
        square = short_circuit_percent**2 - resistive_percent**2
        rounding = resistive_percent <= short_circuit_percent * (1.0 + 1e-12)
        reactive = np.sqrt(np.where(rounding, np.maximum(square, 0.0), square))
        sine = np.sqrt(1.0 - power_factor**2)
    along = resistive_percent * power_factor + reactive * sine
    across = reactive * power_factor - resistive_percent * sine
    return np.asarray(along + across * across / 200.0, np.float64)
