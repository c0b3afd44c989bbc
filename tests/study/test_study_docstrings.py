"""Every public function of solver and study says what each argument is, and nothing that is not one."""

import importlib
import inspect
import pkgutil
import re

import pytest

import app.study
import solver

ENTRY = re.compile(r"^(?P<names>[a-z_0-9]+(?:, [a-z_0-9]+)*) : \S", re.MULTILINE)
ENDINGS = ("Returns", "Raises", "Source")


def public_functions():
    for package in (solver, app.study):
        for found in pkgutil.iter_modules(package.__path__, package.__name__ + "."):
            module = importlib.import_module(found.name)
            for name, value in vars(module).items():
                if inspect.isfunction(value) and value.__module__ == module.__name__ and name[0] != "_":
                    yield pytest.param(value, id=f"{found.name}.{name}")


FUNCTIONS = list(public_functions())


def documented(function):
    doc = inspect.cleandoc(function.__doc__)
    return [n for entry in ENTRY.finditer(doc) for n in entry["names"].split(", ")]


@pytest.mark.parametrize("function", FUNCTIONS)
def test_docstring_and_signature_agree(function):
    parameters = list(inspect.signature(function).parameters)
    assert documented(function) == parameters
    doc = inspect.cleandoc(function.__doc__)
    assert doc.splitlines()[0].rstrip()
    if inspect.signature(function).return_annotation not in (None, "None"):
        assert re.search(r"^Returns : \S", doc, re.MULTILINE)


@pytest.mark.parametrize("function", FUNCTIONS)
def test_endings_stand_in_order(function):
    doc = inspect.cleandoc(function.__doc__)
    stands = [m.start() for e in ENDINGS if (m := re.search(rf"^{e} : ", doc, re.MULTILINE))]
    assert stands == sorted(stands)


def test_the_test_can_fail():
    def wrong(here):
        """A sentence.

        there : (row,) float [V]
        Returns : nothing
        """

    assert documented(wrong) != list(inspect.signature(wrong).parameters)
