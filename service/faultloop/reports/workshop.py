"""The workshop view as a page of HTML that reads well on a screen and on A4; no scripts, everything escaped."""

import re
from collections.abc import Mapping
from functools import lru_cache
from typing import Any

from jinja2 import Environment, PackageLoader, StrictUndefined, Template

from faultloop.assessment.texts import texts
from faultloop.reports.texts import words as drawn

_BEFORE_UNIT = re.compile(r"(?<=\d) (?=(?:Ω|[mk]?A|V|m?s|A²s|mm²|°C|%)(?!\w))")


@lru_cache(maxsize=1)
def _template() -> Template:
    environment = Environment(
        loader=PackageLoader("faultloop.reports"),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
    )
    environment.filters |= {"ranges": ranges, "pairs": pairs, "some": some, "named": named, "unparted": unparted}
    return environment.get_template("workshop.html")


def workshop_page(view: Mapping[str, Any], words: Mapping[str, Any]) -> str:
    """The page of a workshop view, with the words of its language."""
    language = words["language"]
    titles = {check: told.title for check, told in texts(language).checks.items()}
    return _template().render(view=view, words=words, verdicts=drawn(language).verdicts, titles=titles)


def ranges(numbers: list[int], to: str = "{first} to {last}") -> str:
    """Numbers in order, runs of three and more drawn together: 2, 4 to 9."""
    runs: list[list[int]] = []
    for number in sorted(numbers):
        if runs and number == runs[-1][-1] + 1:
            runs[-1].append(number)
        else:
            runs.append([number])
    told = [to.format(first=run[0], last=run[-1]) if len(run) > 2 else ", ".join(map(str, run)) for run in runs]
    return ", ".join(told)


def pairs(told: Mapping[str, Any]) -> str:
    """Names and values in one line."""
    return ", ".join(f"{name} = {value}" for name, value in told.items())


def named(codes: list[str], names: Mapping[str, str]) -> list[str]:
    """What codes are called."""
    return [names[code] for code in codes]


def some(told: list[str], quoted: str = "“{text}”", most: int = 12) -> str:
    """The first of some texts as they came, in quotation marks; an ellipsis where there are more."""
    return ", ".join(quoted.format(text=text) for text in told[:most]) + (" …" if len(told) > most else "")


def unparted(text: str) -> str:
    """A text whose numbers stay on one line with their units."""
    return _BEFORE_UNIT.sub("\N{NO-BREAK SPACE}", text)
