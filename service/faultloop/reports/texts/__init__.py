"""Words of the drawings, one file a language."""

from functools import lru_cache
from importlib import resources

from pydantic import Field

from faultloop.rules.strict import Sheet, Text, read_sheet, read_table


class Words(Sheet):
    """Everything that a drawing says in one language."""

    language: Text
    current_axis: Text
    time_axis: Text
    device_title: Text
    device_subtitle: Text
    assessment_subtitle: Text
    devices_both: Text
    no_device: Text
    band: Text
    slow: Text
    slow_step: Text
    fast: Text
    fast_step: Text
    fast_none: Text
    steps_only: Text
    own_curve: Text
    span: Text
    span_from: Text
    span_to: Text
    span_unknown: Text
    deadline: Text
    deadline_unknown: Text
    device_missing: Text
    band_missing: Text
    disconnection: Text
    disconnection_never: Text
    disconnection_unknown: Text
    data_differ: Text
    caution: Text
    provenance: Text
    provenance_input: Text
    verdicts: dict[str, Text] = Field(min_length=1)
    by: dict[str, Text] = Field(min_length=1)
    bench: dict[str, Text] = Field(min_length=1)


@lru_cache(maxsize=8)
def words(language: str) -> Words:
    """Load the words of one language."""
    file = resources.files("faultloop.reports.texts") / f"{language}.toml"
    return read_sheet(Words, read_table(file), file.name)
