"""Groups of elements for things met at a bench: transformers, and what stands for a person."""

import numpy as np

from faultloop.electrical.circuit_elements import Capacitor, Element, IdealTransformer, Impedance, Resistor
from faultloop.electrical.measurement import Array

# IEC 60990, figures 3 and 4: contact (R_S beside C_S) in series with the body (R_B), and the filter (R_1, C_1).
CONTACT_OHM, CONTACT_NF = 1500.0, 220.0
BODY_OHM = 500.0
FILTER_OHM, FILTER_NF = 10_000.0, 22.0


def real_transformer(
    name: str,
    primary: tuple[str, str],
    secondary: tuple[str, str],
    ratio: Array,
    primary_resistance_ohm: Array,
    primary_leakage_ohm: Array,
    secondary_resistance_ohm: Array,
    secondary_leakage_ohm: Array,
    magnetising_ohm: Array,
    core_loss_ohm: Array,
    interwinding_nf: Array,
) -> tuple[Element, ...]:
    """Two-winding transformer with resistance, leakage, magnetising branch and capacitance between its windings.

    Parameters
    ----------
    name : str
        Each part is called ``name.part``; the inner nodes ``name.core`` and ``name.induced``.
    primary, secondary : (str, str)
        Nodes of each winding, the end of like polarity first.
    ratio : (n,) array
        Primary turns over secondary turns [1].
    primary_resistance_ohm, primary_leakage_ohm : (n,) array
        Resistance and leakage reactance of the primary [Ω].
    secondary_resistance_ohm, secondary_leakage_ohm : (n,) array
        Those of the secondary, on its own side [Ω].
    magnetising_ohm : (n,) array
        Magnetising reactance seen from the primary [Ω]; inf where none is taken.
    core_loss_ohm : (n,) array
        Resistance beside it for the loss in the core [Ω]; inf where none is taken.
    interwinding_nf : (n,) array
        Capacitance between the windings [nF]; 0 where a screen or none is taken.

    Returns
    -------
    tuple of Element
        The primary's impedance, the magnetising branch, an ideal transformer, the secondary's impedance, and one half
        of the capacitance between the first ends, the other between the second ends.

    Notes
    -----
    The windings' capacitance is spread along them; the halves at the ends keep its sum and its middle.

    References
    ----------
    .. [1] IEC 60076-1:2011 (equivalent circuit of a two-winding transformer); the halves are common practice.
    """
    core, induced = f"{name}.core", f"{name}.induced"
    halves = interwinding_nf / 2.0
    return (
        Impedance(f"{name}.primary_winding", primary[0], core, primary_resistance_ohm, primary_leakage_ohm),
        Impedance(f"{name}.magnetising", core, primary[1], np.zeros_like(magnetising_ohm), magnetising_ohm),
        Resistor(f"{name}.core_loss", core, primary[1], core_loss_ohm),
        IdealTransformer(f"{name}.turns", core, primary[1], induced, secondary[1], ratio),
        Impedance(f"{name}.secondary_winding", induced, secondary[0], secondary_resistance_ohm, secondary_leakage_ohm),
        Capacitor(f"{name}.first_ends", primary[0], secondary[0], halves),
        Capacitor(f"{name}.second_ends", primary[1], secondary[1], halves),
    )


def body(
    name: str, touch: str, other: str, internal_ohm: Array, skin_ohm: Array, skin_nf: Array
) -> tuple[Element, ...]:
    """Person between two points: skin, inside of the body, skin.

    Parameters
    ----------
    name : str
        Each part is called ``name.part``; the inner nodes ``name.under_skin`` and ``name.beyond``.
    touch, other : str
        Nodes touched.
    internal_ohm : (n,) array
        Internal impedance Z_i, nearly a resistance [Ω].
    skin_ohm, skin_nf : (n,) array
        Resistance and capacitance of the skin at each contact [Ω, nF]; a skin of 0 nF is a resistance.

    Returns
    -------
    tuple of Element
        The current of the person is that of ``name.internal``.

    References
    ----------
    .. [1] IEC TS 60479-1:2005, figure 1 (impedances of the human body).
    """
    under, beyond = f"{name}.under_skin", f"{name}.beyond"
    return (
        Resistor(f"{name}.skin", touch, under, skin_ohm),
        Capacitor(f"{name}.skin_capacitance", touch, under, skin_nf),
        Impedance(f"{name}.internal", under, beyond, internal_ohm, np.zeros_like(internal_ohm)),
        Resistor(f"{name}.other_skin", beyond, other, skin_ohm),
        Capacitor(f"{name}.other_skin_capacitance", beyond, other, skin_nf),
    )


def touch_current_network(name: str, touch: str, other: str, filtered: bool) -> tuple[Element, ...]:
    """Measuring network for touch current.

    Parameters
    ----------
    name : str
        Each part is called ``name.part``; the voltage U_1 stands at node ``name.body``, U_2 at ``name.filtered``.
    touch, other : str
        Nodes between which it is put.
    filtered : bool
        With the filter for perception and startle reaction (figure 4), or without (figure 3).

    Returns
    -------
    tuple of Element
        Touch current is U_1/500 Ω unweighted, U_2/500 Ω weighted.

    References
    ----------
    .. [1] IEC 60990:2016, figures 3 and 4; values as printed in makers' service manuals.
    """
    middle = f"{name}.body"
    parts: tuple[Element, ...] = (
        Resistor(f"{name}.contact", touch, middle, np.array([CONTACT_OHM])),
        Capacitor(f"{name}.contact_capacitance", touch, middle, np.array([CONTACT_NF])),
        Resistor(f"{name}.body_resistance", middle, other, np.array([BODY_OHM])),
    )
    if not filtered:
        return parts
    return (
        *parts,
        Resistor(f"{name}.filter", middle, f"{name}.filtered", np.array([FILTER_OHM])),
        Capacitor(f"{name}.filter_capacitance", f"{name}.filtered", other, np.array([FILTER_NF])),
    )
