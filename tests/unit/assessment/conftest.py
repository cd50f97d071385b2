"""A small scenario of an invented site, quick to assess."""

import re

import pytest
from small_site import TEXT

from probsoil.scenario import Scenario, parse_scenario


@pytest.fixture(scope="session")
def scenario() -> Scenario:
    return parse_scenario(TEXT)


@pytest.fixture(scope="session")
def fixed_scenario() -> Scenario:
    """The same with every uncertain quantity fixed at its mean."""
    fixed = re.sub(r"\{ dist = [^}]*mean = ([\d.e-]+)[^}]*\}", r"\1", TEXT)
    fixed = re.sub(r"\[\[dependence\]\].*?\n\n", "", fixed, flags=re.DOTALL)
    return parse_scenario(fixed.replace("[site]", "[site]\nmode_factor = 0.8"))
