"""What the drawings of a device and of a stored assessment show, and the same in words."""

from dataclasses import dataclass
from typing import Any

from faultloop.assessment.texts import texts
from faultloop.digests import digest
from faultloop.protection.catalogue import Described, catalogue, device_standard, guaranteed
from faultloop.protection.curves import OwnCurve
from faultloop.protection.designations import OvercurrentDevice, ResidualDevice
from faultloop.reports.figure import Deadline, Figure, Region, Span
from faultloop.reports.scale import ampere, second
from faultloop.reports.svg import svg_bytes
from faultloop.reports.texts import Words, words
from faultloop.rules.loader import LoadedRules

Device = OvercurrentDevice | ResidualDevice
_DIGITS = 12


def device_drawing(device: Device, rules: LoadedRules, provenance: dict[str, str], language: str = "en") -> bytes:
    """Draw the guaranteed band of a device held here under a rule set."""
    told, title = words(language), rules.rules.title
    region = _region(device, rules, told)
    heading = told.device_title.format(device=device.designation)
    subtitle = told.device_subtitle.format(standard=device_standard(device), rules=title)
    notes = [told.steps_only] if region else [told.band_missing.format(device=device.designation)]
    notes += _cautions(rules, language)
    regions = [region] if region else []
    return svg_bytes(
        Figure(
            key="band-" + digest([device.designation, rules.rules.key])[:8],
            language=language,
            title=heading,
            subtitle=subtitle,
            current_axis=told.current_axis,
            time_axis=told.time_axis,
            regions=regions,
            notes=notes,
            footer=[_provenance(provenance, told.provenance), told.caution],
            description=_sentences([subtitle, *_region_words(regions), *notes, told.caution]),
        )
    )


@dataclass(frozen=True, slots=True)
class Judged:
    """A stored assessment: its id, what it was judged on, the answer, and the language to draw it in."""

    id: str
    label: str
    device: OvercurrentDevice | Described | None
    residual: ResidualDevice | None
    rules: LoadedRules
    answer: dict[str, Any]
    language: str


def assessment_drawing(judged: Judged) -> bytes:
    """Draw the bands, the prospective current and the required time of a stored assessment."""
    answer, provenance = judged.answer, judged.answer["provenance"]
    told = words(judged.language)
    quantities = answer["quantities"]
    devices = [device for device in (judged.device, judged.residual) if device is not None]
    regions = [region for device in devices if (region := _region(device, judged.rules, told)) is not None]
    span, required = _span(quantities, told), quantities.get("required_disconnection_time_s")
    deadline = None if required is None else Deadline(required, told.deadline.format(time=second(required)))
    subtitle = told.assessment_subtitle.format(
        verdict=told.verdicts[answer["verdict"]], devices=_devices_words(judged, told), rules=judged.rules.rules.title
    )
    notes = [*_missing(judged, told, regions, span, deadline), _disconnection(quantities, told)]
    notes += _cautions(judged.rules, judged.language)
    if (judged.rules.digest, catalogue().digest) != (provenance["rules_digest"], provenance["devices_digest"]):
        notes.append(told.data_differ)
    marks = [part.words for part in (span, deadline) if part is not None]
    return svg_bytes(
        Figure(
            key=f"assessment-{judged.id}",
            language=told.language,
            title=judged.label,
            subtitle=subtitle,
            current_axis=told.current_axis,
            time_axis=told.time_axis,
            regions=regions,
            span=span,
            deadline=deadline,
            notes=notes,
            footer=[_provenance(provenance, told.provenance_input), told.caution],
            description=_sentences([subtitle, *_region_words(regions), *marks, *notes, told.caution]),
        )
    )


def _cautions(rules: LoadedRules, language: str) -> list[str]:
    """What every word said under this rule set must warn of."""
    return [texts(language).cautions[name].text for name in rules.rules.cautions]


def _region(device: Device | Described, rules: LoadedRules, told: Words) -> Region | None:
    band, scale = guaranteed(device, rules.rules)
    if not band.slow:
        return None
    slow = [told.slow_step.format(time=second(t), current=ampere(i * scale)) for i, t in band.slow]
    fast = [told.fast_step.format(time=second(t), current=ampere(i * scale)) for i, t in band.fast]
    return Region(
        isinstance(device, ResidualDevice),
        band,
        scale,
        told.band.format(device=device.designation),
        told.slow.format(steps=", ".join(slow)),
        told.fast.format(steps=", ".join(fast)) if fast else told.fast_none,
    )


def _region_words(regions: list[Region]) -> list[str]:
    return [part for region in regions for part in (region.words, region.slow_words, region.fast_words)]


def _devices_words(judged: Judged, told: Words) -> str:
    device = told.no_device if judged.device is None else judged.device.designation
    if judged.residual is None:
        return device
    return told.devices_both.format(device=device, residual=judged.residual.designation)


def _span(quantities: dict[str, Any], told: Words) -> Span | None:
    """The prospective current; a least one of zero is as good as no least one on this scale."""
    current = quantities.get("prospective_earth_fault_current_a", {})
    least, greatest = current.get("least"), current.get("greatest")
    ends = {"least": ampere(least or 0.0), "greatest": ampere(greatest or 0.0)}
    if least is None and greatest is None:
        return None
    if greatest is None:
        return Span(least, None, told.span_from.format_map(ends))
    if least is None:
        return Span(None, greatest, told.span_to.format_map(ends))
    return Span(least, greatest, told.span.format_map(ends))


def _missing(
    judged: Judged, told: Words, regions: list[Region], span: Span | None, deadline: Deadline | None
) -> list[str]:
    """What is not drawn, and why."""
    notes = [told.steps_only] if regions else []
    if judged.device is None:
        notes.append(told.device_missing)
    if isinstance(judged.device, OwnCurve):
        notes.append(told.own_curve)
    for device in (judged.device, judged.residual):
        if device is not None and not guaranteed(device, judged.rules.rules)[0].slow:
            notes.append(told.band_missing.format(device=device.designation))
    if span is None:
        notes.append(told.span_unknown)
    if deadline is None:
        notes.append(told.deadline_unknown)
    return notes


def _disconnection(quantities: dict[str, Any], told: Words) -> str:
    time = quantities.get("disconnection_time_s")
    if time is None:
        return told.disconnection_unknown
    if time["greatest"] is None or time["by"] == "none":
        return told.disconnection_never
    least = second(time["least"] or 0.0)
    return told.disconnection.format(least=least, greatest=second(time["greatest"]), by=told.by[time["by"]])


def _provenance(provenance: dict[str, str], template: str) -> str:
    return template.format_map({k: v[:_DIGITS] if k.endswith("_digest") else v for k, v in provenance.items()})


def _sentences(parts: list[str]) -> str:
    """One text of sentences for those who do not see the drawing."""
    told = [part if part.endswith(".") else f"{part}." for part in parts]
    return " ".join(part[:1].upper() + part[1:] for part in told)
