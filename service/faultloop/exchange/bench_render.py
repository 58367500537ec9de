"""A bench in words, and the one path from a request to its answer."""

from functools import cached_property, lru_cache

import numpy as np

from faultloop.assessment.benches.columns import MILLI
from faultloop.assessment.benches.consequences import planned_link, seen
from faultloop.assessment.benches.solving import SolvedBench, solve_bench
from faultloop.assessment.benches.states import INTRUSION, State
from faultloop.assessment.benches.texts import bench_texts
from faultloop.assessment.benches.typical import typical
from faultloop.assessment.codes import Codes
from faultloop.assessment.standing import Verdict
from faultloop.assessment.texts import LANGUAGES, texts
from faultloop.assessment.urgency import Urgency
from faultloop.digests import digest, rounded
from faultloop.electrical.body import discharge_time, stored_energy
from faultloop.exchange.bench_devices import devices_seen
from faultloop.exchange.bench_judging import JudgedBench, input_digest_of, judged_bench
from faultloop.exchange.bench_mapping import MappedBench, mapped_bench
from faultloop.exchange.bench_networks import BenchRequest
from faultloop.exchange.bench_numbers import Body, ends_body, short
from faultloop.exchange.bench_words import BenchWords


def _words(codes: type[Codes]) -> dict[int, str]:
    return {code: word for word, code in codes.codes().items()}


_VERDICTS, _URGENCIES = _words(Verdict), _words(Urgency)


def bench_answer(request: BenchRequest, language: str = LANGUAGES[0]) -> Body:
    """Solve and judge one bench in all its states, and put it in words."""
    return solved_answer(request, language)[1]


def solved_answer(request: BenchRequest, language: str = LANGUAGES[0]) -> tuple[SolvedBench, Body]:
    """The solved bench beside its answer, as a drawing needs both."""
    rules = request.rule_set
    given = mapped_bench(request)
    body, tie = rules.rules.urgency.body_dry.value, rules.rules.separation.contact_referenced.value
    solved = solve_bench(given.bench, body, tie)
    judged = judged_bench(request, solved, input_digest_of(request), language)
    words = BenchWords(solved, bench_texts(language), rules.rules, request.contacts)
    return solved, _Answer(request, given, solved, judged, words).body()


class _Answer:
    """One answer in the making."""

    def __init__(
        self, request: BenchRequest, given: MappedBench, solved: SolvedBench, judged: JudgedBench, words: BenchWords
    ) -> None:
        self._request, self._given, self._solved, self._judged, self._words = request, given, solved, judged, words
        self._states = solved.states
        self._told = judged.answers[self._states.base]

    def body(self) -> Body:
        """The whole answer."""
        base, first = self._states.base, self._told[0]
        body: Body = {"label": self._request.label}
        if self._request.location is not None:
            body["location"] = self._request.location
        body["judged"] = "with-planned-link" if base else "as-found"
        body["verdict"] = _VERDICTS[self._judged.verdict[base]]
        body["urgency"] = _URGENCIES[self._judged.urgency[base]]
        for field, state in self._words.told_states.items():
            body[field] = self._state(state)
        if (planned := planned_link(self._solved)) is not None:
            devices = devices_seen(self._request, self._words.rules, seen(self._solved, 1), self._words.texts)
            body["planned_link"] = self._words.planned(planned, devices)
        body["nodes"] = self._words.nodes()
        body["contacts"] = self._words.contacts()
        body["lines_ma"] = self._words.lines()
        body["touch_voltage_limit_v"] = self._words.rules.disconnection.touch_voltage_ac.value
        body["contacts_left_out"] = self._words.left_out()
        body["changes_as_found"] = self._changes(self._states.found_changes)
        body["changes"] = self._changes(self._states.changes)
        body["stored"] = self._stored()
        body["findings"] = self._findings()
        for field, key in (("conditions", "condition"), ("not_examined", "subject"), ("not_applicable", "check")):
            body[field] = self._gathered(field, key)
        body["assumptions"] = [*self._assumed(), *self._gathered("assumptions", "assumption")]
        body["cautions"] = self._cautions()
        body["policy"], body["provenance"] = first["policy"], self._provenance(first["provenance"])
        return body

    def _state(self, state: int) -> Body:
        contact, least, greatest = self._words.worst(state)
        return {
            "verdict": _VERDICTS[self._judged.verdict[state]],
            "urgency": _URGENCIES[self._judged.urgency[state]],
            "floats": self._words.tied(state) == "no",
            "tied": self._words.tied(state),
            "worst_contact": {"from": contact.one, "to": contact.other},
            "worst_contact_current_ma": ends_body(least, greatest),
            "live_parts": self._words.live(state),
        }

    def _changes(self, states: tuple[int, ...]) -> list[Body]:
        """Changes by what they come to: what floats, then what meets every check, the least contact and intrusion."""
        floats = self._solved.floats
        most = self._solved.single_currents.greatest.max(axis=1) * MILLI

        def rank(state: int) -> tuple[bool, bool, bool, float, int, str, str]:
            change = self._states.every[state]
            # Nobody measures a contact current closer than to two digits; below that the lesser intrusion goes first.
            current, intrusion = float(f"{most[state]:.2g}"), self._intrusion(change)
            live, unmet = bool(self._words.live(state)), bool(self._judged.unmet[state])
            return not floats[state], live, unmet, current, intrusion, change.kind, change.subject

        return [self._change(at + 1, state) for at, state in enumerate(sorted(states, key=rank))]

    def _intrusion(self, change: State) -> int:
        """How much a change takes; without the item that is worked at there is no work."""
        bench = self._solved.bench
        item = next((item for item in bench.items if item.id == change.subject), None)
        ends_work = change.kind == "unplug" and item is not None and bench.under_test(item)
        return max(INTRUSION.values()) + 1 if ends_work else INTRUSION[change.kind]

    def _change(self, rank: int, state: int) -> Body:
        change, told = self._states.every[state], self._state(state)
        contact, _, most = self._words.worst(state)
        limit = self._words.rules.separation.contact_most.value
        words = {"yes": "tied", "perhaps": "may-be-tied"}.get(told["tied"])
        if words is None and told["live_parts"]:
            words = "instrument-live" if self._words.live(state, surely=True) else "instrument-perhaps-live"
        words = words or ("helps" if most <= limit else "floats-too-much")
        if words == "helps" and self._judged.verdict[state] < self._judged.verdict[self._before(state)]:
            words = "worsens"
        text = self._words.texts.outcomes[words].format(
            change=self.change_words(change),
            contact=self._words.contact_short(contact),
            current=short(most),
            limit=f"{limit:g}",
            pole=self._tied_pole(state),
            parts=", ".join(told["live_parts"]),
            voltage=self._words.voltage,
        )
        if words in ("helps", "worsens") and self._judged.unmet[state]:
            text += " " + self._words.texts.outcomes["still"].format(failed="; ".join(self._judged.unmet[state]))
        body: Body = {"rank": rank, "change": change.kind}
        if change.subject:
            body["subject"] = change.subject
        return {**body, **told, "helps": words == "helps", "text": text[:1].upper() + text[1:]}

    def _before(self, state: int) -> int:
        """The state that a change is made to."""
        return 0 if state in self._states.found_changes else self._states.base

    def change_words(self, change: State) -> str:
        """A change as a sentence names it."""
        bench = self._solved.bench
        kind = next((link.kind for link in bench.all_links if link.id == change.subject), "other")
        planned = bench.planned is not None and change.subject == bench.planned.id
        words = "remove-planned" if change.kind == "remove-link" and planned else change.kind
        quoted = {"subject": change.subject, "kind": self._words.texts.links[kind]}
        return self._words.texts.changes[words].format_map(quoted)

    @cached_property
    def _tied_poles(self) -> dict[str, list[bool]]:
        """Of every pole that is to float whether it is tied, state by state."""
        solved = self._solved
        named = [pole for supply in self._judged.supplies for pole in (supply.l2, supply.l1)]
        named += [item.pole("L1") for item in solved.bench.items if solved.bench.under_test(item)]
        return {name: solved.tied_at([name])[1].tolist() for name in named}

    def _tied_pole(self, state: int) -> str:
        """A pole that is tied in a state."""
        return next((name for name, tied in self._tied_poles.items() if tied[state]), "")

    def _stored(self) -> list[Body]:
        to_v = self._words.rules.separation.discharged.value
        found = []
        for item in self._solved.bench.items:
            if item.stored is None:
                continue
            uf, volts, ohm = item.stored.capacitance_uf, item.stored.voltage_v, item.stored.discharge_ohm
            columns = (np.array([uf]), np.array([volts]))
            energy = float(stored_energy(*columns)[0])
            time = float(discharge_time(*columns, np.array([np.inf if ohm is None else ohm]), np.array([to_v]))[0])
            words = "below" if volts <= to_v else "stays" if ohm is None else "falls"
            text = self._words.texts.stored[words].format(
                item=item.label,
                capacitance=f"{uf:g}",
                voltage=f"{volts:g}",
                energy=short(energy),
                resistance=f"{ohm:g}" if ohm is not None else "",
                to=f"{to_v:g}",
                time=short(time),
            )
            body: Body = {"item": item.id, "energy_j": rounded(energy), "charge_c": rounded(uf * 1e-6 * volts)}
            if np.isfinite(time):
                body["discharge_time_s"] = rounded(time)
            found.append({**body, "discharged_to_v": to_v, "text": text})
        return found

    def _findings(self) -> list[Body]:
        """Findings of every separated supply, each with its name."""
        return [
            {**finding, "supply": supply.id}
            for supply, answer in zip(self._judged.supplies, self._told, strict=True)
            for finding in answer["findings"]
        ]

    def _gathered(self, field: str, key: str) -> list[Body]:
        """What the supplies say besides, each thing once; what applies to one of them applies."""
        found = {body[key]: body for answer in self._told for body in answer[field]}
        if field in ("not_examined", "not_applicable"):
            judged = {finding["check"] for answer in self._told for finding in answer["findings"]}
            found = {name: body for name, body in found.items() if name not in judged}
        return list(found.values())

    def _assumed(self) -> list[Body]:
        told = self._words.texts.assumed
        return [
            {
                "assumption": f"{of.owner}: {of.what}" if of.owner else of.what,
                "text": told[of.what].format(owner=of.owner, span=self._words.span(of.span, of.unit)),
            }
            for of in self._given.assumed
        ]

    def _cautions(self) -> list[Body]:
        """Cautions of this bench, some of them every point's too, and those of its supplies; each once."""
        bench, language = self._solved.bench, self._words.texts.language
        named = ["pole-to-pole", "upstream-residual-blind", "separated-state"]
        if not all(self._solved.floats[state] for state in self._words.told_states.values()):
            named.append("bench-referenced")
        if any(item.stored is not None for item in bench.items):
            named.append("stored-energy")
        own = ["float-the-item"]
        if any(self._words.live(state) for state in self._words.told_states.values()):
            own.append("live-part")
        if any(supply.kind == "battery" for supply in bench.supplies):
            own.append("battery-not-solved")
        if any(item.live_chassis and bench.supply(item.fed_by).kind == "earthed" for item in bench.items):
            own.append("plugs-as-stated")
        told = [(name, texts(language).cautions[name].text) for name in named]
        told += [(name, self._words.texts.cautions[name]) for name in own]
        first = [{"caution": name, "text": text} for name, text in told]
        return first + [of for of in self._gathered("cautions", "caution") if of["caution"] not in named]

    def _provenance(self, told: Body) -> Body:
        own = _data_digests(self._words.texts.language)
        return {**told, "texts_digest": digest([told["texts_digest"], own[0]]), "bench_data_digest": own[1]}


@lru_cache(maxsize=8)
def _data_digests(language: str) -> tuple[str, str]:
    """Digests of the sentences and of what is taken where nothing is stated."""
    return digest(bench_texts(language).model_dump(mode="json")), digest(typical().model_dump(mode="json"))
