"""Words of the workshop view, one file a language, and who acts on what."""

from functools import lru_cache
from importlib import resources

from faultloop.exchange.answers import UrgencyWord
from faultloop.rules.strict import DataFileError, Sheet, Text, read_sheet, read_table


class Headings(Sheet):
    """Headings of the view."""

    title: Text
    counts: Text
    stop_use: Text
    fix: Text
    questions: Text
    conditions: Text
    written: Text
    not_tested: Text
    sample: Text
    cautions: Text
    provenance: Text


class Columns(Sheet):
    """Headings of the columns of the page."""

    row: Text
    point: Text
    verdict: Text
    found: Text
    who: Text
    question: Text
    releases: Text
    answers: Text
    condition: Text
    rows: Text
    owner: Text
    what: Text
    why: Text
    judged: Text


class Sentences(Sheet):
    """Sentences of the view and of its page."""

    batch: Text
    counts: Text
    defaults: Text
    touch: Text
    raw: Text
    quoted: Text
    cells: Text
    of: Text
    to: Text
    stop_use_none: Text
    fix_none: Text
    questions_none: Text
    held_explanation: Text
    not_judged: Text
    changed: Text
    also: Text
    limits: Text
    devices: Text
    input: Text


class SampleWords(Sheet):
    """What is said of the sample."""

    plain: Text
    unstated: Text
    stated: Text
    all: Text


class Who(Sheet):
    """Those who act."""

    responsible: Text
    electrician: Text
    distributor: Text
    tester: Text
    sender: Text


class Usual(Sheet):
    """Who acts where no check says otherwise."""

    fix: Text
    stop_use: Text
    settle: Text
    held: Text


class WorkshopWords(Sheet):
    """Everything that the view says in one language."""

    language: Text
    urgencies: dict[UrgencyWord, Text]
    changes: dict[str, Text]
    headings: Headings
    columns: Columns
    sentences: Sentences
    sample: SampleWords
    written: dict[str, Text]
    who: Who
    fixes: dict[str, Text]
    default: Usual

    def acts(self, role: str) -> str:
        """Who is meant by a role."""
        told: str = getattr(self.who, role)
        return told

    def fixes_by(self, check: str) -> str:
        """Who puts a failed check right."""
        return self.acts(self.fixes.get(check, self.default.fix))


@lru_cache(maxsize=8)
def workshop_words(language: str = "en") -> WorkshopWords:
    """Load the words of one language."""
    file = resources.files("faultloop.exchange") / "data" / f"workshop.{language}.toml"
    if not file.is_file():
        raise DataFileError(f"no words of the workshop view in {language!r}")
    return read_sheet(WorkshopWords, read_table(file), file.name)
