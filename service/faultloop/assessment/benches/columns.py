"""States of a solved bench as columns of points: every separated supply in every state is one point to be judged."""

from dataclasses import dataclass

import numpy as np

from faultloop.assessment.benches.consequences import planned_link
from faultloop.assessment.benches.contacts import worked_at
from faultloop.assessment.benches.network import Item, Supply
from faultloop.assessment.benches.solving import Ends, SolvedBench
from faultloop.assessment.benches.states import AS_FOUND, LIFTED, UNPLUGGED
from faultloop.assessment.points import Choice, EarthContacts, Flags, Ints, Number, PlannedLink, Points, Reference
from faultloop.electrical.body import discharge_time
from faultloop.electrical.measurement import Array

MILLI = 1000.0
_CONTACTS = {"none": EarthContacts.UNCONNECTED, "non-earthed": EarthContacts.BONDED, "earthed": EarthContacts.EARTHED}


@dataclass(frozen=True, slots=True)
class Columns:
    """What the checks are told of one supply in every state, (states,) each."""

    contact_ma: Ends
    tied: Flags
    items: Array
    class_i: Array
    earth_contacts: Ints


def supply_columns(solved: SolvedBench, supply: Supply) -> Columns:
    """One separated supply in every state."""
    bench, places = solved.bench, solved.places
    mine = [at for at, item in enumerate(bench.items) if item.fed_by == supply.id]
    here = (places[:, mine] == AS_FOUND).astype(np.float64)
    exposed = np.array([bench.items[at].protection_class == "I" for at in mine], np.float64)
    lifted = solved.states.column("bonding")[:, bench.supplies.index(supply)] == LIFTED
    contacts = np.where(lifted, EarthContacts.BONDED, _CONTACTS[supply.bonding])
    return Columns(_contact(solved, supply), _tied(solved, supply), here.sum(axis=1), (here * exposed).sum(axis=1), contacts)


def _concerns(solved: SolvedBench, supply: Supply, item: Item) -> bool:
    """An item worked at counts at the supply that feeds it; one on an earthed outlet at every separated supply."""
    return item.fed_by == supply.id or solved.bench.supply(item.fed_by).kind == "earthed"


def _contact(solved: SolvedBench, supply: Supply) -> Ends:
    """Greatest current of one hand [mA]: at this supply's poles, at any part, at what is worked at."""
    others = {pole for s in solved.bench.supplies if s.id != supply.id for pole in (s.l1, s.l2)}
    others |= {
        item.pole(which)
        for item in solved.bench.items
        if not _concerns(solved, supply, item)
        for which in ("L1", "L2")
    }
    chosen = [at for at, contact in enumerate(solved.singles) if contact.one not in others]
    ends = solved.single_currents
    return Ends(*(MILLI * of[:, chosen].max(axis=1) for of in (ends.least, ends.nominal, ends.greatest)))


def _tied(solved: SolvedBench, supply: Supply) -> Flags:
    """Whether a pole of the supply, or of what is worked at elsewhere, has a tie to earth."""
    where = np.arange(solved.count)
    tied = [solved.tied[where, solved.node(name)] for name in (supply.l1, supply.l2)]
    for touched in worked_at(solved.bench):
        item = solved.bench.items[solved.meanings[touched.one][0]]
        if _concerns(solved, supply, item):
            plugged = solved.places[:, solved.meanings[touched.one][0]] != UNPLUGGED
            tied.append(solved.tied[where, solved.node(touched.one)] & plugged)
    return np.asarray(np.logical_or.reduce(tied), np.bool_)


def put_columns(points: Points, solved: SolvedBench) -> None:
    """Fill the columns of points that are laid out state by state, the separated supplies of each in their order."""
    supplies = [supply for supply in solved.bench.supplies if supply.kind == "separated"]
    told = [supply_columns(solved, supply) for supply in supplies]
    numbers, choices = points.numbers, points.choices

    def laid(columns: list[Array] | list[Ints] | list[Flags]) -> Array:
        return np.stack(columns, axis=1).ravel().astype(np.float64)

    numbers[Number.CONTACT_LEAST_MA] = laid([of.contact_ma.least for of in told])
    numbers[Number.CONTACT_MA] = laid([of.contact_ma.nominal for of in told])
    numbers[Number.CONTACT_GREATEST_MA] = laid([of.contact_ma.greatest for of in told])
    numbers[Number.ITEMS] = laid([of.items for of in told])
    numbers[Number.CLASS_I_ITEMS] = laid([of.class_i for of in told])
    choices[Choice.EARTH_CONTACTS] = laid([of.earth_contacts for of in told])
    tied = laid([of.tied for of in told]) > 0.0
    choices[Choice.REFERENCE] = np.where(tied, Reference.EARTHED, Reference.FLOATING)
    for which, value in zip((Number.STORED_UF, Number.STORED_V, Number.DISCHARGE_OHM), stored(solved), strict=True):
        numbers[which] = value
    link = planned_link(solved)
    if link is not None:
        made = np.repeat(np.array([state.planned for state in solved.states.every]), len(supplies))
        choices[Choice.PLANNED_LINK] = np.where(made, link.code, PlannedLink.NONE)
        for which, value in zip(
            (Number.LINK_LEAST_MA, Number.LINK_MA, Number.LINK_GREATEST_MA),
            (link.current_a.least, link.current_a.nominal, link.current_a.greatest),
            strict=True,
        ):
            numbers[which] = np.where(made, MILLI * value, np.nan)


def stored(solved: SolvedBench) -> tuple[float, float, float]:
    """Capacitance, voltage and resistance of what stays charged the longest; nan where nothing is."""
    charged = [item.stored for item in solved.bench.items if item.stored is not None]
    if not charged:
        return np.nan, np.nan, np.nan
    told = [(of.capacitance_uf, of.voltage_v, np.inf if of.discharge_ohm is None else of.discharge_ohm) for of in charged]
    columns = [np.array(column) for column in zip(*told, strict=True)]
    times = discharge_time(*columns, np.ones(len(told)))
    # Of those that nothing discharges, the one with the most charge.
    longest = max(range(len(told)), key=lambda at: (times[at], told[at][0] * told[at][1]))
    uf, volts, ohm = told[longest]
    return uf, volts, np.nan if np.isinf(ohm) else ohm
