"""Texts by reason, one file a language, and their strict loader."""

from functools import lru_cache
from importlib import resources

from pydantic import Field

from faultloop.rules.strict import DataFileError, Sheet, Text, read_sheet, read_table

# Languages that answers are given in; the first is given where none of them is asked for.
LANGUAGES = ("en", "de")


class Said(Sheet):
    """What is said of one reason."""

    explanation: Text
    settled_by: Text | None = None
    cautions: list[Text] = Field(default_factory=list)


class Condition(Sheet):
    """A condition and who sees to it."""

    text: Text
    owner: Text


class Caution(Sheet):
    """A caution; some stand under every answer."""

    text: Text
    always: bool = False


class CheckTexts(Sheet):
    """Texts of one check."""

    title: Text
    applies_not: Text
    reasons: dict[str, Said]


class Texts(Sheet):
    """Everything that is said in one language."""

    language: Text
    unused: Text
    sentences: dict[str, str]
    phrases: dict[str, Text]
    shared: dict[str, Said]
    checks: dict[str, CheckTexts]
    conditions: dict[str, Condition]
    subjects: dict[str, Text]
    assumptions: dict[str, Text]
    cautions: dict[str, Caution]

    def said(self, check: str, reason: str) -> Said:
        """What a check says for a reason: its own words, else the shared ones."""
        own = self.checks[check].reasons.get(reason)
        return own if own is not None else self.shared[reason]

    def expanded(self, template: str, variants: dict[str, str]) -> str:
        """Template with its @names replaced by sentences, picked by variant where there are several."""
        words = template.split(" ")
        names = [word[1:] if word.startswith("@") else None for word in words]
        put = [
            self.sentences[f"{name}.{variants[name]}" if name in variants else name] if name else word
            for name, word in zip(names, words, strict=True)
        ]
        return " ".join(part for part in put if part)


def _nested(table: dict[str, object]) -> dict[str, object]:
    """Bring the reasons of each check, written as sub-tables beside its title, under one key."""
    checks = table.get("checks")
    if not isinstance(checks, dict):
        return table
    nested = {}
    for name, own in checks.items():
        plain = {key: value for key, value in own.items() if not isinstance(value, dict)}
        nested[name] = {
            **plain,
            "reasons": {key: value for key, value in own.items() if isinstance(value, dict)},
        }
    return {**table, "checks": nested}


@lru_cache(maxsize=8)
def texts(language: str = "en") -> Texts:
    """Load the texts of one language."""
    file = resources.files("faultloop.assessment.texts") / f"{language}.toml"
    if not file.is_file():
        raise DataFileError(f"no texts in {language!r}")
    return read_sheet(Texts, _nested(read_table(file)), file.name)
