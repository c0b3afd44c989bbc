"""Examples in docstrings run, and every public function of the solver documents what it takes and gives."""

import doctest
import importlib
import inspect
import pkgutil

import pytest

import solver

MODULES = [
    solver,
    *(importlib.import_module(f"solver.{m.name}") for m in pkgutil.iter_modules(solver.__path__)),
]


@pytest.mark.parametrize("module", MODULES, ids=lambda m: m.__name__)
def test_examples(module):
    assert doctest.testmod(module).failed == 0


def test_the_package_has_an_example():
    assert doctest.testmod(solver).attempted >= 10


def functions():
    for module in MODULES[1:]:
        for name, member in inspect.getmembers(module, inspect.isfunction):
            if member.__module__ == module.__name__ and not name.startswith("_"):
                yield pytest.param(member, id=f"{module.__name__}.{name}")


@pytest.mark.parametrize("function", list(functions()))
def test_every_argument_is_documented(function):
    lines = [line.strip() for line in (function.__doc__ or "").splitlines()]
    documented = [line.partition(" : ")[0] for line in lines if " : " in line]
    for name in inspect.signature(function).parameters:
        assert name in documented, f"{name} is not documented"
    if function.__annotations__.get("return") is not None:
        assert "Returns" in documented
