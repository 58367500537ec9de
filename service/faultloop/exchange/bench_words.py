"""Parts of a bench's answer: intervals, nodes, contacts, and what devices see of a planned link."""

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from faultloop.assessment.benches.consequences import Planned
from faultloop.assessment.benches.contacts import MOST_PARTS_PAIRED, Contact, accessible, usual_contacts
from faultloop.assessment.benches.joined import joined_supplies
from faultloop.assessment.benches.network import EARTH, Link, Span, node_names
from faultloop.assessment.benches.solving import Ends, SolvedBench
from faultloop.assessment.benches.texts import BenchTexts
from faultloop.assessment.benches.ties import APART, Standing, Ties
from faultloop.assessment.benches.typical import typical
from faultloop.assessment.codes import PlannedLink
from faultloop.digests import rounded
from faultloop.exchange.bench_networks import BenchContact
from faultloop.exchange.bench_numbers import LEAST_TOLD_V, Body, ends_body, ohms, short, volts_body
from faultloop.rules.sheets import RuleSet

MILLI = 1000.0
PAIRED = ("part-to-part", "part-to-pole", "across-supplies")
ONE_NODE_V = 1.0  # parts that stand less than this apart are told as one


@dataclass(frozen=True)
class BenchWords:
    """Puts parts of one solved bench in words."""

    solved: SolvedBench
    texts: BenchTexts
    rules: RuleSet
    asked: list[BenchContact]

    @cached_property
    def told_states(self) -> dict[str, int]:
        """The states that are told in full: by the name of their field, their number."""
        told = {"as_found": 0}
        return told if self.solved.bench.planned is None else {**told, "with_planned_link": 1}

    def between(self, least: float, greatest: float) -> str:
        """Two ends as a sentence has them: one number where they print alike."""
        one, other = short(least), short(greatest)
        if one == other:
            return one
        return self.texts.parts["interval"].format(least=one, greatest=other)

    def span(self, span: Span, unit: str) -> str:
        """An assumed span with its unit."""
        if unit == "ohm":
            one, other = ohms(span.least), ohms(span.greatest)
            return one if one == other else self.texts.parts["interval"].format(least=one, greatest=other)
        return f"{self.between(span.least, span.greatest)} {unit}"

    def nodes(self) -> list[Body]:
        """Every node, with the names that an item's poles have beside."""
        names = node_names(self.solved.bench)
        aliases: dict[str, list[str]] = {}
        for name in names:
            if name in self.solved.meanings:
                aliases.setdefault(self.solved.meanings[name][1][0], []).append(name)
        ties = {field: Ties(self.solved, state) for field, state in self.told_states.items()}
        real = [name for name in names if name != EARTH and name not in self.solved.meanings]
        at = np.stack([self.solved.node(name) for name in real], axis=1)
        wired, rows = self.solved.wired, np.arange(len(self.solved.wired.potential_v))[:, None]
        potential = self.solved.ends(wired.potential_v[rows, self.solved.rows(at)])
        found = []
        for column, name in enumerate(real):
            body: Body = {"node": name, "same_as": sorted(aliases.get(name, []))}
            for field, state in self.told_states.items():
                stands = ties[field].standing(name)
                told: Body = {"standing": stands.word, "path": self._path(stands), "steps": self._steps(stands)}
                if stands.word != APART:
                    told["path_impedance_ohm"] = rounded(stands.path_ohm)
                    ends = (float(potential.least[state, column]), float(potential.greatest[state, column]))
                    told["potential_v"] = volts_body(*ends)
                body[field] = told
            found.append(body)
        return found

    def _path(self, stands: Standing) -> str:
        steps = self.texts.parts["then"].join(
            self.texts.parts["step"].format(step=self.step(step.kind, step.owner), node=self._name(step.to))
            for step in stands.steps
        )
        tie = ohms(self.solved.tie_ohm)
        return self.texts.standing[stands.word].format(steps=steps, ohm=ohms(stands.path_ohm), tie=tie)

    def _steps(self, stands: Standing) -> list[Body]:
        return [{"through": self.step(step.kind, step.owner), "of": step.owner, "to": step.to} for step in stands.steps]

    def _name(self, node: str) -> str:
        return self.texts.parts["earth"] if node == EARTH else node

    def step(self, kind: str, owner: str) -> str:
        """What a step leads through."""
        told = self.texts.steps
        if kind == "link":
            link = next(link for link in self.solved.bench.all_links if link.id == owner)
            return told["link"].format(kind=self.texts.links[link.kind], owner=owner)
        earthed = kind == "source" and self.solved.bench.supply(owner).kind == "earthed"
        return told["source-earthed" if earthed else kind].format(owner=owner)

    def link_words(self, link: Link) -> dict[str, str]:
        """What sentences quote of a link."""
        return {"kind": self.texts.links[link.kind], "id": link.id, "one": link.one, "other": self._name(link.other)}

    def _contacts_across(self) -> list[Contact]:
        """Poles of two supplies that conductors join: nobody knows how their transformers are poled to each other."""
        solved, told = self.solved, list(self.told_states.values())
        return [
            Contact("across-supplies", one, pole)
            for supply in solved.bench.supplies
            if supply.kind == "separated"
            for other, joined in joined_supplies(solved, supply).items()
            if supply.id < other and joined[1, told].any()
            for one in (supply.l1, supply.l2)
            for pole in (solved.bench.supply(other).l1, solved.bench.supply(other).l2)
        ]

    def contacts(self) -> list[Body]:
        """The usual contacts and those asked for; pairs of parts that are one node are no contact."""
        told = [*usual_contacts(self.solved.bench), *self._live_contacts(), *self._contacts_across()]
        asked = {frozenset((of.one, of.other)) for of in self.asked}
        usual = {frozenset((of.one, of.other)) for of in told}
        told += [Contact("asked", of.one, of.other) for of in self.asked if frozenset((of.one, of.other)) not in usual]
        voltage, current = self.solved.touched(told)
        between, found = voltage.greatest[list(self.told_states.values())], []
        # Parts that stand together in every state that is told are one part.
        one: list[bool] = np.all(between < ONE_NODE_V, axis=0).tolist()
        for column, contact in enumerate(told):
            if contact.kind in PAIRED and one[column] and frozenset((contact.one, contact.other)) not in asked:
                continue
            body: Body = {
                "kind": contact.kind,
                "hands": "one" if contact.single else "two",
                "from": contact.one,
                "to": contact.other,
                "text": self.contact_words(contact),
            }
            for field, state in self.told_states.items():
                body[field] = self._touched(voltage, current, state, column)
            found.append(body)
        return found

    def left_out(self) -> int:
        """How many pairs of parts were too many to look at."""
        parts = len(accessible(self.solved.bench))
        most = min(parts, MOST_PARTS_PAIRED)
        return parts * (parts - 1) // 2 - most * (most - 1) // 2

    def contact_words(self, contact: Contact) -> str:
        """A contact as a sentence names it."""
        return self.texts.contacts[contact.kind].format(one=contact.one, other=self._name(contact.other))

    def tied(self, state: int) -> str:
        """Whether the bench is tied in a state: yes, perhaps (by what is not known), no."""
        return self._tied[state]

    @cached_property
    def _tied(self) -> list[str]:
        surely, perhaps = self.solved.bench_tied.tolist()
        return ["yes" if one else "perhaps" if other else "no" for one, other in zip(surely, perhaps, strict=True)]

    def live(self, state: int, *, surely: bool = False) -> list[str]:
        """Parts of instruments that are joined to a pole in a state, or may be."""
        return [name for name, live in self._live.items() if live[0 if surely else 1][state]]

    @cached_property
    def _live(self) -> dict[str, list[list[bool]]]:
        return {name: live.tolist() for name, live in self.solved.live_parts.items() if live.any()}

    def _live_contacts(self) -> list[Contact]:
        """Every live part with both poles of the supply that it is live from."""
        told = list(self.told_states.values())
        return [
            Contact("part-to-pole", name, pole)
            for supply in self.solved.bench.supplies
            for name, live in self.solved.live_at.get(supply.id, {}).items()
            if live[1, told].any()
            for pole in (supply.l1, supply.l2)
        ]

    @property
    def voltage(self) -> str:
        """The highest voltage between the poles of a separated supply."""
        told = [supply.voltage_v for supply in self.solved.bench.supplies if supply.kind == "separated"]
        return f"{max(told):g}"

    def contact_short(self, contact: Contact) -> str:
        """A contact by its two nodes."""
        return self.texts.parts["contact"].format(one=contact.one, other=self._name(contact.other))

    def _touched(self, voltage: Ends, current: Ends, state: int, column: int) -> Body:
        most = float(current.greatest[state, column]) * MILLI
        body: Body = {"current_ma": ends_body(float(current.least[state, column]), most / MILLI, MILLI)}
        if np.isfinite(voltage.greatest[state, column]):
            body["voltage_v"] = volts_body(float(voltage.least[state, column]), float(voltage.greatest[state, column]))
        body["within"] = self.within(most)
        body["explanation"] = self._arithmetic(voltage.nominal[state, column], current.nominal[state, column])
        return body

    def _arithmetic(self, voltage: float, current: float) -> str:
        """How a contact's current comes about at the nominal values."""
        told = self.texts.contacts
        if not np.isfinite(voltage):
            return told["apart"]
        if voltage < LEAST_TOLD_V or current == 0.0:
            return told["quiet"]
        quoted = {"voltage": voltage, "impedance": voltage / current, "current": current * MILLI}
        # Four digits, and no power of ten: these are typed into a calculator.
        words = {name: f"{float(f'{value:.4g}'):.12g}" for name, value in quoted.items()}
        return told["arithmetic"].format(**words, body=f"{self.solved.body_ohm:g}")

    def lines(self) -> dict[str, float]:
        """The rule set's lines of contact current [mA], the least first."""
        told = self.rules.separation
        return {
            "unfelt": told.contact_unfelt.value,
            "limit": told.contact_most.value,
            "let-go": told.contact_referenced.value,
        }

    def within(self, most_ma: float) -> str:
        """The line of the rule set that a contact current stays within."""
        return next((word for word, line in self.lines().items() if most_ma <= line), "none")

    def worst(self, state: int) -> tuple[Contact, float, float]:
        """The contact of one hand that carries most in a state, with its ends [mA]."""
        return self._worst[state]

    @cached_property
    def _worst(self) -> list[tuple[Contact, float, float]]:
        """Of every state the contact of one hand that carries most, with its ends [mA]."""
        ends, at = self.solved.single_currents, np.arange(self.solved.count)
        columns = self.solved.worst
        least, greatest = ((of[at, columns] * MILLI).tolist() for of in (ends.least, ends.greatest))
        contacts = [self.solved.singles[column] for column in columns.tolist()]
        return list(zip(contacts, least, greatest, strict=True))

    def planned(self, planned: Planned, devices: list[Body]) -> Body:
        """The planned link with its consequences."""
        link = self.solved.bench.planned
        assert link is not None
        words = {code: word for word, code in PlannedLink.codes().items()}
        contact, _, after = self.worst(1)
        before = self._same_contact(contact, 0)
        current = (float(planned.current_a.least), float(planned.current_a.greatest))
        light = planned.code == PlannedLink.TIES and after <= self.lines()["let-go"]
        amperes = planned.code == PlannedLink.SHORTS
        scale = 1.0 if amperes else MILLI
        text = self.texts.planned["ties-lightly" if light else words[planned.code]].format(
            **self.link_words(link),
            current=self.between(current[0] * scale, current[1] * scale),
            contact=self.contact_short(contact),
            after=short(after),
            before=short(before),
        )
        if amperes:
            told = [of["text"] for of in devices if of["current_a"]["greatest"] >= typical().short_circuit_from.usual]
            text = " ".join([text, *told])
        elif planned.code == PlannedLink.KEEPS:
            text += self._raised()
        fresh = [name for name in self.live(1) if name not in self.live(0)]
        if fresh:
            sure = set(fresh) <= set(self.live(1, surely=True))
            told_live = self.texts.planned["live" if sure else "live-perhaps"]
            text += " " + told_live.format(parts=", ".join(fresh), voltage=self.voltage)
        return {
            "id": link.id,
            "kind": link.kind,
            "from": link.one,
            "to": link.other,
            "current_ma": ends_body(*current, MILLI),
            "ties": self.tied(1),
            "devices": devices,
            "text": text,
        }

    def _raised(self) -> str:
        """The contact that the planned link raises above a line of the rule set, if it does so to any."""
        before, after = (self.solved.single_currents.greatest[state] * MILLI for state in (0, 1))
        for line in sorted(self.lines().values(), reverse=True):
            over = np.where((before <= line) & (after > line), after, 0.0)
            if over.any():
                contact = self.solved.singles[int(over.argmax())]
                numbers = {"before": short(float(before[over.argmax()])), "after": short(float(over.max()))}
                told = self.texts.planned["raises"]
                return " " + told.format(contact=self.contact_short(contact), limit=f"{line:g}", **numbers)
        return ""

    def _same_contact(self, contact: Contact, state: int) -> float:
        column = self.solved.singles.index(contact)
        return float(self.solved.single_currents.greatest[state, column]) * MILLI
