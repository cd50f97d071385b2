"""Every public function and class says what it takes and gives: shape and unit of each number."""

import importlib
import inspect
import pkgutil
import re
from collections.abc import Iterator
from types import ModuleType

import pytest
from numpydoc.docscrape import FunctionDoc, NumpyDocString

import probsoil

NUMBER = re.compile(r"\b(ndarray|array_like|float|int)\b")
ARRAY = re.compile(r"\b(ndarray|array_like)\b")
UNIT = re.compile(r"\[[^\]]+\]")
SHAPE = re.compile(r"shape \(|shape of")
SEE = re.compile(r"See `([A-Za-z]+)\.([a-z_]+)`\.")


def public_modules() -> Iterator[ModuleType]:
    for found in pkgutil.walk_packages(probsoil.__path__, "probsoil."):
        parts = found.name.split(".")
        # commands carry their help text in the docstring
        if not any(part.startswith("_") for part in parts[1:]) and parts[1] != "cli":
            yield importlib.import_module(found.name)


def public_objects() -> dict[str, object]:
    objects: dict[str, object] = {}
    for module in public_modules():
        for name, value in vars(module).items():
            own = getattr(value, "__module__", None) == module.__name__
            if own and not name.startswith("_") and (inspect.isfunction(value) or inspect.isclass(value)):
                objects[f"{module.__name__}.{name}"] = value
                if inspect.isclass(value):
                    objects |= {
                        f"{module.__name__}.{name}.{method}": function
                        for method, function in vars(value).items()
                        if inspect.isfunction(function)
                        and not method.startswith("_")
                        and function.__module__ == module.__name__
                    }
    return objects


OBJECTS = public_objects()


def entries(value: object) -> list[tuple[str, str]]:
    """Return name and type line of all numbers that a docstring lists."""
    text = inspect.getdoc(value) or ""
    doc = FunctionDoc(value) if inspect.isfunction(value) else NumpyDocString(text)
    sections = ("Parameters", "Returns", "Yields", "Attributes")
    return [
        (entry.name, entry.type)
        for section in sections
        for entry in doc[section]
        if NUMBER.search(entry.type) and not entry.type.startswith(("callable", "mapping", "dict", "str"))
    ]


def parameters_of(name: str) -> list[str]:
    function = OBJECTS[name]
    assert inspect.isfunction(function)
    return list(inspect.signature(function).parameters)


def described_by(name: str) -> str:
    """Return the name of what describes the parameters: the object itself, or the method it cites.

    A method may say "See `Protocol.method`." and nothing else, where a protocol of its own module
    has that method, under the same name and with the same parameters.
    """
    cited = SEE.fullmatch(inspect.getdoc(OBJECTS[name]) or "")
    if cited is None:
        return name
    module, _, own = name.rsplit(".", 2)
    protocol = f"{module}.{cited[1]}"
    assert getattr(OBJECTS[protocol], "_is_protocol", False), f"{protocol} is not a protocol"
    assert cited[2] == own
    here, there = (parameters_of(one) for one in (name, f"{protocol}.{own}"))
    assert here == there
    return f"{protocol}.{own}"


@pytest.mark.parametrize("name", OBJECTS)
def test_it_has_a_docstring(name: str) -> None:
    assert inspect.getdoc(OBJECTS[name])


@pytest.mark.parametrize("name", [name for name, value in OBJECTS.items() if inspect.isfunction(value)])
def test_every_parameter_is_described(name: str) -> None:
    wanted = [one for one in parameters_of(name) if one not in ("self", "cls", "_")]
    described = FunctionDoc(OBJECTS[described_by(name)])["Parameters"]
    listed = [part.strip(" *") for entry in described for part in entry.name.split(",")]
    assert set(wanted) <= set(listed), f"not described: {set(wanted) - set(listed)}"


@pytest.mark.parametrize("name", OBJECTS)
def test_every_number_has_a_unit_and_every_array_a_shape(name: str) -> None:
    for entry, kind in entries(OBJECTS[name]):
        assert UNIT.search(kind), f"{entry} : {kind} has no unit"
        if ARRAY.search(kind):
            assert SHAPE.search(kind), f"{entry} : {kind} has no shape"
