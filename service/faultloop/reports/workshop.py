"""The workshop view as a page of HTML that reads well on a screen and on A4; no scripts, everything escaped."""

from collections.abc import Mapping
from functools import lru_cache
from typing import Any

from jinja2 import Environment, PackageLoader, StrictUndefined, Template


@lru_cache(maxsize=1)
def _template() -> Template:
    environment = Environment(
        loader=PackageLoader("faultloop.reports"),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
    )
    environment.filters |= {"ranges": ranges, "pairs": pairs, "some": some}
    return environment.get_template("workshop.html")


def workshop_page(view: Mapping[str, Any], words: Mapping[str, Any]) -> str:
    """The page of a workshop view, with the words of its language."""
    return _template().render(view=view, words=words)


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


def some(texts: list[str], most: int = 12) -> str:
    """The first of some texts as they came, in quotation marks; an ellipsis where there are more."""
    return ", ".join(f"“{text}”" for text in texts[:most]) + (" …" if len(texts) > most else "")
