"""States of a solved bench as columns of points: every separated supply in every state is one point to be judged."""

from dataclasses import dataclass

import numpy as np

from faultloop.assessment.benches.consequences import planned_link
from faultloop.assessment.benches.contacts import worked_at
from faultloop.assessment.benches.joined import bonded_by_links, counted, joined_supplies
from faultloop.assessment.benches.network import Item, Supply
from faultloop.assessment.benches.solving import Ends, SolvedBench
from faultloop.assessment.benches.states import LIFTED
from faultloop.assessment.codes import Bound, Choice, EarthContacts, Method, Number, PlannedLink, Reading, Reference
from faultloop.assessment.points import Ints, Points
from faultloop.electrical.measurement import Array, Interval, Mask

MILLI = 1000.0
_CONTACTS = {"none": EarthContacts.UNCONNECTED, "non-earthed": EarthContacts.BONDED, "earthed": EarthContacts.EARTHED}


@dataclass(frozen=True, slots=True)
class Columns:
    """What the checks are told of one supply in every state, (states,) each."""

    contact_ma: Ends
    reference: Ints
    items: Array
    class_i: Array
    earth_contacts: Ints
    bonding_ohm: Interval
    several: Mask


def supply_columns(solved: SolvedBench, supply: Supply) -> Columns:
    """One separated supply in every state."""
    bench = solved.bench
    exposed = [at for at, item in enumerate(bench.items) if item.protection_class == "I"]
    lifted = solved.states.column("bonding")[:, bench.supplies.index(supply)] == LIFTED
    contacts = np.where(lifted, EarthContacts.BONDED, _CONTACTS[supply.bonding])
    reference = _reference(solved, supply)
    contact = _contact(solved, supply, reference)
    items, class_i = (counted(solved, supply, of) for of in (list(range(len(bench.items))), exposed))
    several = np.array([of[1] for of in joined_supplies(solved, supply).values()]).sum(axis=0) > 1
    contacts, bonding = _bonding(solved, supply, np.asarray(contacts, np.int64), several)
    return Columns(contact, reference, items, class_i, contacts, bonding, several)


def _bonding(solved: SolvedBench, supply: Supply, contacts: Ints, several: Mask) -> tuple[Ints, Interval]:
    """Earth contacts with what links make of them, and the resistance of a bonding by links [Ω], nan where none is."""
    contacts, ends = contacts.copy(), np.full((2, solved.count), np.nan)
    asked = (contacts == EarthContacts.UNCONNECTED) | (several & (contacts == EarthContacts.BONDED))
    for state in np.flatnonzero(asked):
        bonded = bonded_by_links(solved, supply, int(state))
        if bonded is not None:
            contacts[state] = EarthContacts.BONDED
            ends[:, state] = bonded.least_ohm, bonded.greatest_ohm
        elif several[state]:
            contacts[state] = EarthContacts.UNCONNECTED
    return contacts, Interval(ends[0], ends[1], ends.mean(axis=0))


def _concerns(solved: SolvedBench, supply: Supply, item: Item) -> bool:
    """An item worked at counts at the supply that feeds it; one on an earthed outlet at every separated supply."""
    return item.fed_by == supply.id or solved.bench.supply(item.fed_by).kind == "earthed"


def _contact(solved: SolvedBench, supply: Supply, reference: Ints) -> Ends:
    """Greatest current of one hand [mA]: at this supply's poles, at any part, at what is worked at.

    Where nobody knows whether a pole is joined to earth the worse is taken as nominal, for the work is ordered by it.
    """
    others = {pole for s in solved.bench.supplies if s.id != supply.id for pole in (s.l1, s.l2)}
    others |= {
        item.pole(which) for item in solved.bench.items if not _concerns(solved, supply, item) for which in ("L1", "L2")
    }
    chosen = [at for at, contact in enumerate(solved.singles) if contact.one not in others]
    ends = solved.single_currents
    least, nominal, greatest = (MILLI * of[:, chosen].max(axis=1) for of in (ends.least, ends.nominal, ends.greatest))
    return Ends(least, np.where(reference == Reference.UNKNOWN, greatest, nominal), greatest)


def _reference(solved: SolvedBench, supply: Supply) -> Ints:
    """Whether a pole of the supply, or of what is worked at elsewhere, is joined to earth or to what may be touched."""
    names = [supply.l1, supply.l2]
    names += [of.one for of in worked_at(solved.bench) if _concerns(solved, supply, _item(solved, of.one))]
    surely, perhaps = solved.tied_at(names)
    live = np.zeros((2, solved.count), np.bool_)
    for part in solved.live_at.get(supply.id, {}).values():
        live |= part
    floating = np.where(live[1], Reference.PART_PERHAPS, Reference.FLOATING)
    floating = np.where(live[0], Reference.PART_AT_POLE, floating)
    unsure = np.where(perhaps, Reference.UNKNOWN, floating)
    return np.where(surely, Reference.EARTHED, unsure)


def _item(solved: SolvedBench, pole: str) -> Item:
    """The item whose pole a name is."""
    return solved.bench.items[solved.meanings[pole][0]]


def put_columns(points: Points, solved: SolvedBench) -> None:
    """Fill the columns of points that are laid out state by state, the separated supplies of each in their order."""
    supplies = [supply for supply in solved.bench.supplies if supply.kind == "separated"]
    told = [supply_columns(solved, supply) for supply in supplies]
    numbers, choices = points.numbers, points.choices

    def laid(columns: list[Array] | list[Ints]) -> Array:
        return np.stack(columns, axis=1).ravel().astype(np.float64)

    numbers[Number.CONTACT_LEAST_MA] = laid([of.contact_ma.least for of in told])
    numbers[Number.CONTACT_MA] = laid([of.contact_ma.nominal for of in told])
    numbers[Number.CONTACT_GREATEST_MA] = laid([of.contact_ma.greatest for of in told])
    numbers[Number.ITEMS] = laid([of.items for of in told])
    numbers[Number.CLASS_I_ITEMS] = laid([of.class_i for of in told])
    choices[Choice.EARTH_CONTACTS] = laid([of.earth_contacts for of in told])
    choices[Choice.REFERENCE] = laid([of.reference for of in told])
    _put_bonding(points, told)
    charged = (Number.STORED_UF, Number.STORED_V, Number.DISCHARGE_OHM)
    for which, held in zip(charged, stored(solved), strict=True):
        numbers[which] = held
    # A link that shorts a source is one to be told of whether it is planned or made.
    choices[Choice.PLANNED_LINK] = np.repeat(np.where(solved.shorts, PlannedLink.SHORTS, 0), len(supplies))
    link = planned_link(solved)
    if link is not None:
        made = np.repeat(np.array([state.planned for state in solved.states.every]), len(supplies))
        codes = np.repeat(link.codes, len(supplies))
        choices[Choice.PLANNED_LINK] = np.where(made, codes, choices[Choice.PLANNED_LINK])
        for which, value in zip(
            (Number.LINK_LEAST_MA, Number.LINK_MA, Number.LINK_GREATEST_MA),
            (link.current_a.least, link.current_a.nominal, link.current_a.greatest),
            strict=True,
        ):
            numbers[which] = np.where(made, MILLI * value, np.nan)


def _put_bonding(points: Points, told: list[Columns]) -> None:
    """Bonding by links as a reading between its ends; of the leads of several supplies the longest are not known."""
    greatest, usual = (
        np.stack([getattr(of.bonding_ohm, end) for of in told], axis=1).ravel() for end in ("greatest", "nominal")
    )
    by_links = np.isfinite(usual)
    # A bonding stated as nothing has no width of its own.
    percent = 100.0 * np.divide(greatest - usual, usual, out=np.zeros_like(usual), where=usual > 0.0)
    at = Reading.BONDING
    points.value[at] = np.where(by_links, usual, points.value[at])
    points.percent[at] = np.where(by_links, percent, points.percent[at])
    points.constant[at] = np.where(by_links, 0.0, points.constant[at])
    points.bound[at] = np.where(by_links, Bound.EXACT, points.bound[at])
    points.method[at] = np.where(by_links, Method.CALCULATED, points.method[at])
    several = np.stack([of.several for of in told], axis=1).ravel()
    points.numbers[Number.LEADS_OHM] = np.where(several, np.nan, points.numbers[Number.LEADS_OHM])


def stored(solved: SolvedBench) -> tuple[float, float, float]:
    """Capacitance, voltage and resistance of what stays charged the longest; nan where nothing is."""
    charged = [item.stored for item in solved.bench.items if item.stored is not None]
    if not charged:
        return np.nan, np.nan, np.nan
    told = [(of.capacitance_uf, of.voltage_v, of.discharge_ohm or np.inf) for of in charged]
    # By the time constant; of those that nothing discharges, the one with the most charge.
    uf, volts, ohm = max(told, key=lambda of: (of[2] * of[0], of[0] * of[1]))
    return uf, volts, np.nan if np.isinf(ohm) else ohm
