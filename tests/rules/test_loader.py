"""The loader: extending, overriding, digests and the newest edition."""

from pathlib import Path

import pytest

from faultloop.digests import digest
from faultloop.rules.loader import load, resolve, shipped
from faultloop.rules.strict import DataFileError
from tests.rules.loading import SHIPPED_FILES, SOURCE, extending, loaded

LEAST = '[voltage_factor]\nleast = {{ value = {value}, unit = "1", {source} }}\n'


def test_an_extension_says_what_its_base_says_where_it_is_silent(tmp_path: Path) -> None:
    sets = loaded(tmp_path, extending("iec-60364:2017"))
    base, over = (sets[key].rules.model_dump(exclude={"id", "edition"}) for key in ("iec-60364:2017", "museum:2020"))
    assert over == base
    assert sets["museum:2020"].rules.key == "museum:2020"


def test_an_override_changes_one_value_and_its_source_and_nothing_else(tmp_path: Path) -> None:
    sets = loaded(tmp_path, extending("iec-60364:2017", LEAST.format(value=0.93, source=SOURCE)))
    base, over = sets["iec-60364:2017"].rules, sets["museum:2020"].rules
    assert over.voltage_factor.least.value == 0.93
    assert over.voltage_factor.least.source == "nobody"
    assert over.voltage_factor.greatest == base.voltage_factor.greatest
    other = {"id", "edition", "voltage_factor"}
    assert over.model_dump(exclude=other) == base.model_dump(exclude=other)


def test_a_table_of_rows_is_replaced_whole(tmp_path: Path) -> None:
    row = (
        '[[disconnection.table]]\nearthing = "TN"\ncurrent = "ac"\nabove_v = 50\nvalue = 0.3\nunit = "s"\n'
        'clause = "1"\nsource = "nobody"\nsourcing = "assumption"\nchecked = 2020-01-01\n'
    )
    sets = loaded(tmp_path, extending("iec-60364:2017", row))
    base, over = sets["iec-60364:2017"].rules.disconnection, sets["museum:2020"].rules.disconnection
    assert [(r.earthing, r.value) for r in over.table] == [("TN", 0.3)]
    assert over.distribution_tn == base.distribution_tn


def test_clauses_are_overridden_one_by_one(tmp_path: Path) -> None:
    sets = loaded(tmp_path, extending("iec-60364:2017", '[clauses]\n"earth-electrode" = "99"\n'))
    base, over = sets["iec-60364:2017"].rules.clauses, sets["museum:2020"].rules.clauses
    assert over == {**base, "earth-electrode": "99"}


def test_an_extension_can_be_extended_and_the_nearest_override_holds(tmp_path: Path) -> None:
    first = extending("iec-60364:2017", LEAST.format(value=0.93, source=SOURCE))
    second = extending("museum:2020", 'title = "Second"\n', name="museum", edition="2021")
    third = extending("museum:2021", LEAST.format(value=0.91, source=SOURCE), name="museum", edition="2022")
    sets = loaded(tmp_path, third, second, first)
    assert sets["museum:2021"].rules.voltage_factor.least.value == 0.93
    assert sets["museum:2022"].rules.voltage_factor.least.value == 0.91
    assert sets["museum:2022"].rules.title == "Second"


def test_files_that_extend_each_other_are_refused(tmp_path: Path) -> None:
    one = extending("other:2020")
    other = extending("museum:2020", name="other")
    with pytest.raises(DataFileError, match=r"written-\d\.toml: extends: .* leads back to itself"):
        loaded(tmp_path, one, other)


def test_files_are_told_by_id_and_edition_not_by_their_names(tmp_path: Path) -> None:
    for key in shipped():
        assert loaded(tmp_path)[key].rules.key == key


def test_digest_does_not_depend_on_order_comments_or_how_a_number_is_written(tmp_path: Path) -> None:
    plain = extending("iec-60364:2017", LEAST.format(value="1", source=SOURCE))
    other = "# a comment\n" + extending("iec-60364:2017", LEAST.format(value="1.000", source=SOURCE))
    reordered = (
        'edition = "2020"\nid = "museum"\nextends = "iec-60364:2017"\n[voltage_factor.least]\nunit = "1"\nvalue = 1e0\n'
        'sourcing = "assumption"\nchecked = 2020-01-01\nsource = "nobody"\nclause = "1"\n'
    )
    digests = {loaded(tmp_path, text)["museum:2020"].digest for text in (plain, other, reordered)}
    assert len(digests) == 1


@pytest.mark.parametrize(
    "changed",
    [
        LEAST.format(value=0.950001, source=SOURCE),
        LEAST.format(value=0.95, source=SOURCE.replace("nobody", "somebody")),
        LEAST.format(value=0.95, source=SOURCE.replace("2020", "2021")),
        'title = "Other"\n' + LEAST.format(value=0.95, source=SOURCE),
    ],
)
def test_digest_changes_with_everything_that_is_said(tmp_path: Path, changed: str) -> None:
    before = loaded(tmp_path, extending("iec-60364:2017", LEAST.format(value=0.95, source=SOURCE)))
    after = loaded(tmp_path, extending("iec-60364:2017", changed))
    assert before["museum:2020"].digest != after["museum:2020"].digest
    assert before["iec-60364:2017"].digest == after["iec-60364:2017"].digest


def test_digest_of_an_extension_changes_with_its_base(tmp_path: Path) -> None:
    def top(value: float) -> str:
        base = extending("iec-60364:2017", LEAST.format(value=value, source=SOURCE))
        return loaded(tmp_path, base, extending("museum:2020", edition="2021"))["museum:2021"].digest

    assert top(0.95) != top(0.94)


def test_digest_is_that_of_the_resolved_set() -> None:
    for found in shipped().values():
        assert found.digest == digest(found.rules.model_dump(mode="json"))


def test_order_of_files_does_not_matter() -> None:
    forwards, backwards = load(SHIPPED_FILES), load(SHIPPED_FILES[::-1])
    assert forwards == {key: backwards[key] for key in forwards}


@pytest.mark.parametrize("key", sorted(shipped()))
def test_every_edition_is_found_by_its_key(key: str) -> None:
    found = resolve(key)
    assert found is not None
    assert found.rules.key == key


@pytest.mark.parametrize("name", sorted({found.rules.id for found in shipped().values()}))
def test_a_name_alone_means_its_newest_edition(name: str) -> None:
    found = resolve(name)
    editions = [each.rules.edition for each in shipped().values() if each.rules.id == name]
    assert found is not None
    assert found.rules.id == name
    assert all(found.rules.edition >= edition for edition in editions)


def test_the_newest_british_edition_is_the_2018_one() -> None:
    found = resolve("bs-7671")
    assert found is not None
    assert found.rules.key == "bs-7671:2018"


@pytest.mark.parametrize("name", ["", "bs", "bs-7671:", "bs-7671:1966", "BS-7671", ":2018", "iec-60364:2017 "])
def test_an_unknown_name_finds_nothing(name: str) -> None:
    assert resolve(name) is None
