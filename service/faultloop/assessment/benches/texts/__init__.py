"""What is said of benches, one file a language."""

from functools import lru_cache
from importlib import resources

from faultloop.rules.strict import Sheet, Text, read_sheet, read_table


class BenchTexts(Sheet):
    """Every sentence about benches in one language."""

    language: Text
    parts: dict[str, Text]
    links: dict[str, Text]
    steps: dict[str, Text]
    standing: dict[str, Text]
    contacts: dict[str, Text]
    changes: dict[str, Text]
    outcomes: dict[str, Text]
    seen: dict[str, Text]
    planned: dict[str, Text]
    stored: dict[str, Text]
    assumed: dict[str, Text]
    cautions: dict[str, Text]


@lru_cache(maxsize=8)
def bench_texts(language: str) -> BenchTexts:
    """Load the sentences of one language."""
    file = resources.files("faultloop.assessment.benches.texts") / f"{language}.toml"
    return read_sheet(BenchTexts, read_table(file), file.name)
