"""Help for the tests of rule sets: files written for one test, loaded beside the shipped ones."""

from importlib import resources
from pathlib import Path

from faultloop.rules.loader import LoadedRules, load

SETS = resources.files("faultloop.rules") / "data" / "sets"
SHIPPED_FILES = sorted((file for file in SETS.iterdir() if file.name.endswith(".toml")), key=lambda file: file.name)
SOURCE = 'clause = "1", source = "nobody", sourcing = "assumption", checked = 2020-01-01'


def extending(base: str, body: str = "", name: str = "museum", edition: str = "2020") -> str:
    """Text of a rule set that extends another one."""
    return f'extends = "{base}"\nid = "{name}"\nedition = "{edition}"\n{body}'


def loaded(folder: Path, *texts: str) -> dict[str, LoadedRules]:
    """Write texts as files and load them beside the shipped sets."""
    files = []
    for at, text in enumerate(texts):
        file = folder / f"written-{at}.toml"
        file.write_text(text, encoding="utf-8")
        files.append(file)
    return load([*SHIPPED_FILES, *files])
