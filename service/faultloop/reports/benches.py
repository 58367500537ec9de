"""The drawing of a bench: its network with potentials, the scale of contact currents, and the same in words."""

from typing import Any

from faultloop.assessment.benches.network import EARTH, Bench
from faultloop.assessment.benches.texts import bench_texts
from faultloop.digests import digest
from faultloop.reports.bench_layout import WIDTH, laid_out
from faultloop.reports.bench_network import put_network
from faultloop.reports.bench_scale import put_scale
from faultloop.reports.bench_symbols import put_key
from faultloop.reports.sheet import LARGE, MARGIN, PLAIN, SMALL, Sheet
from faultloop.reports.texts import Words, words

MOST_CHANGES = 5
_DIGITS = 12


def bench_drawing(bench: Bench, answer: dict[str, Any], language: str = "en") -> bytes:
    """Draw a bench with what its answer says of it."""
    told = words(language)
    key = "bench-" + digest([answer["provenance"]["input_digest"], language])[:8]
    sheet = Sheet(key, language, answer["label"], _description(answer, told), WIDTH)
    sheet.y = MARGIN - 6.0
    sheet.lines(answer["label"], LARGE, font_weight="bold")
    sheet.lines(_subtitle(answer, told), PLAIN)
    if "planned_link" in answer:
        sheet.lines(answer["planned_link"]["text"], PLAIN)
    layout = laid_out(bench, sheet.y + 24.0)
    put_network(sheet, bench, layout, answer, told)
    sheet.y = layout.earth + 26.0
    put_key(sheet, answer, told)
    for at, link in enumerate(bench.all_links):
        kind = bench_texts(language).links[link.kind]
        ends = " – ".join(told.bench["earth"] if end == EARTH else end for end in (link.one, link.other))
        sheet.lines(f"{at + 1}. {kind} {link.id}: {ends}", PLAIN)
    put_scale(sheet, answer, told)
    _put_changes(sheet, answer, told)
    sheet.y += 6.0
    for line in _foot(answer, told):
        sheet.lines(line, SMALL, fill="#333333")
    return sheet.written()


def _subtitle(answer: dict[str, Any], told: Words) -> str:
    return told.bench["subtitle"].format(
        verdict=told.verdicts[answer["verdict"]],
        urgency=told.bench[f"urgency-{answer['urgency']}"],
        state=told.bench[answer["judged"]],
    )


def _put_changes(sheet: Sheet, answer: dict[str, Any], told: Words) -> None:
    changes = answer["changes"][:MOST_CHANGES]
    if not changes:
        return
    sheet.y += 8.0
    sheet.lines(told.bench["changes"], PLAIN, font_weight="bold")
    for change in changes:
        sheet.lines(f"{change['rank']}. {change['text']}", PLAIN)
    left = len(answer["changes"]) - len(changes)
    if left:
        sheet.lines(told.bench["more-changes"].format(count=left), PLAIN)


def _foot(answer: dict[str, Any], told: Words) -> list[str]:
    cautions = {caution["caution"]: caution["text"] for caution in answer["cautions"]}
    named = [cautions[name] for name in ("pole-to-pole", "upstream-residual-blind", "float-the-item")]
    provenance = {k: v[:_DIGITS] if k.endswith("_digest") else v for k, v in answer["provenance"].items()}
    return [*named, told.caution, told.provenance_input.format_map(provenance)]


def _description(answer: dict[str, Any], told: Words) -> str:
    """Everything that the drawing shows, for those who do not see it."""
    parts = [_subtitle(answer, told)]
    if "planned_link" in answer:
        parts.append(answer["planned_link"]["text"])
    for node in answer["nodes"]:
        for field in ("as_found", "with_planned_link"):
            if field in node:
                parts.append(f"{node['node']}, {told.bench[field.replace('_', '-')]}: {node[field]['path']}")
    parts += [change["text"] for change in answer["changes"][:MOST_CHANGES]]
    parts.append(told.caution)
    return " ".join(part if part.endswith(".") else f"{part}." for part in parts)
