"""Docstrings of the computing rooms are held against the signatures."""

import importlib
import inspect
import pkgutil
import re
import types
from collections.abc import Callable, Iterator
from typing import Any

import pytest

import faultloop.electrical
import faultloop.protection

ROOMS: tuple[types.ModuleType, ...] = (faultloop.electrical, faultloop.protection)
# Of protection, these turn a standard's table into a guarantee and so must say which table.
FROM_A_STANDARD = {"breaker_band", "fuse_band", "residual_band"}


def documented() -> Iterator[tuple[str, Callable[..., Any]]]:
    """Public functions and methods of the two rooms, by their dotted name."""
    for room in ROOMS:
        for info in pkgutil.iter_modules(room.__path__, f"{room.__name__}."):
            module = importlib.import_module(info.name)
            for name, thing in vars(module).items():
                if name.startswith("_") or getattr(thing, "__module__", None) != info.name:
                    continue
                if inspect.isclass(thing):
                    for method, body in vars(thing).items():
                        if inspect.isfunction(body) and not method.startswith("_"):
                            yield f"{info.name}.{name}.{method}", body
                elif callable(thing):
                    yield f"{info.name}.{name}", inspect.unwrap(thing)


FUNCTIONS = dict(documented())


def parameters(function: Callable[..., Any]) -> list[str]:
    """Names of the parameters, without self."""
    return [name for name in inspect.signature(function).parameters if name != "self"]


WITH_PARAMETERS = sorted(name for name, function in FUNCTIONS.items() if parameters(function))
COMPUTING = sorted(
    name
    for name in WITH_PARAMETERS
    if name.startswith("faultloop.electrical") or name.rsplit(".", 1)[1] in FROM_A_STANDARD
)


def sections(function: Callable[..., Any]) -> dict[str, str]:
    """Sections of a docstring by title."""
    text = inspect.cleandoc(function.__doc__ or "")
    parts = re.split(r"^(\w[\w ]*)\n-{3,}\n", text, flags=re.MULTILINE)
    return {"Summary": parts[0], **dict(zip(parts[1::2], parts[2::2], strict=True))}


def test_there_are_functions_to_hold() -> None:
    assert len(WITH_PARAMETERS) >= 15
    computing = {name.rsplit(".", 1)[1] for name in COMPUTING}
    assert computing >= FROM_A_STANDARD
    assert computing >= {"single_contact_currents", "current_to_earth", "regulation", "discharge_time"}


@pytest.mark.parametrize("name", sorted(FUNCTIONS))
def test_summary_is_one_sentence_on_one_line(name: str) -> None:
    summary = inspect.cleandoc(FUNCTIONS[name].__doc__ or "").splitlines()
    assert summary, "no docstring"
    assert summary[0].endswith("."), summary[0]
    assert len(summary) == 1 or summary[1] == "", "the summary runs on"


@pytest.mark.parametrize("name", WITH_PARAMETERS)
def test_parameters_section_names_the_real_parameters(name: str) -> None:
    told = sections(FUNCTIONS[name]).get("Parameters", "")
    heads = re.findall(r"^(\w[\w, ]*) : \S", told, flags=re.MULTILINE)
    assert [one.strip() for head in heads for one in head.split(",")] == parameters(FUNCTIONS[name])


@pytest.mark.parametrize("name", WITH_PARAMETERS)
def test_returns_section_is_there_where_something_is_returned(name: str) -> None:
    returns = inspect.signature(FUNCTIONS[name]).return_annotation
    assert ("Returns" in sections(FUNCTIONS[name])) == (returns is not None)


@pytest.mark.parametrize("name", COMPUTING)
def test_references_are_numbered_and_name_a_standard(name: str) -> None:
    told = sections(FUNCTIONS[name]).get("References", "")
    assert re.search(r"^\.\. \[1\] \S", told, flags=re.MULTILINE), "no numbered reference"
    assert re.search(r"(IEC|IEEE|JCGM) ", told), "no standard named"


@pytest.mark.parametrize("name", COMPUTING)
def test_physical_parameters_and_results_state_a_unit(name: str) -> None:
    told = sections(FUNCTIONS[name])
    suffixed = [p for p in parameters(FUNCTIONS[name]) if re.search(r"_(v|a|ohm|s|m|mm2|c|ma|ka)$", p)]
    for parameter in suffixed:
        body = re.search(rf"^\w*[\w, ]*\b{parameter}\b.*\n((?:    .*\n?)+)", told["Parameters"], flags=re.MULTILINE)
        assert body, parameter
        assert re.search(r"\[[^\]]+\]", body[1]), f"{parameter}: no unit in brackets"


@pytest.mark.parametrize("name", WITH_PARAMETERS)
def test_every_exception_raised_is_told(name: str) -> None:
    raised = set(re.findall(r"raise (\w+)\(", inspect.getsource(FUNCTIONS[name])))
    told = sections(FUNCTIONS[name]).get("Raises", "")
    assert raised <= set(re.findall(r"^(\w+)$", told, flags=re.MULTILINE))
