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
    environment.filters["ranges"] = ranges
    return environment.get_template("workshop.html")


def workshop_page(view: Mapping[str, Any], words: Mapping[str, Any]) -> str:
    """The page of a workshop view, with the words of its language."""
    return _template().render(view=view, words=words)


def ranges(numbers: list[int]) -> str:
    """Numbers in order, runs of three and more drawn together: 2, 4 to 9."""
    runs: list[list[int]] = []
    for number in sorted(numbers):
        if runs and number == runs[-1][-1] + 1:
            runs[-1].append(number)
        else:
            runs.append([number])
    told = [f"{run[0]} to {run[-1]}" if len(run) > 2 else ", ".join(map(str, run)) for run in runs]
    return ", ".join(told)
