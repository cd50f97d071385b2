"""A small sound scenario that the tests spoil one key at a time."""

import pytest

BASE = """\
format = 1
title = "Test bank"
seed = 3
horizon = 30

[site]
water_table = 1.0
base = "drained"

[[layers]]
name = "crust"
soil = "clay"
thickness = 1.5
unit_weight = 17.5
void_ratio = 1.1
lambda = { dist = "lognormal", mean = 0.12, cov = 0.20 }
kappa = 0.02
preconsolidation = { stress = 90 }
M = 1.1
permeability = { cv = 3.0 }

[[layers]]
name = "soft clay"
soil = "clay"
thickness = { dist = "normal", mean = 7.0, sd = 0.6 }
unit_weight = { dist = "normal", mean = 15.8, cov = 0.03 }
void_ratio = 1.9
Cc = { dist = "lognormal", mean = 0.80, cov = 0.12 }
Cs = { dist = "lognormal", mean = 0.11, cov = 0.20 }
preconsolidation = { pop = { dist = "lognormal", mean = 18, cov = 0.30 } }
phi = 26
permeability = { k = { dist = "lognormal", mean = 1.2e-9, cov = 0.7 }, ck = 0.95 }

[[layers]]
name = "sand"
soil = "granular"
thickness = 3.0
unit_weight = 19.0
constrained_modulus = "25 MPa"
phi = 33

[load]
shape = "embankment"
crest_width = 12.0
side_slope = 2.0
fill_unit_weight = { dist = "normal", mean = 19.0, cov = 0.04 }
fill_phi = 34

[[stages]]
name = "first lift"
height = 1.5
start = 0
end = "4 weeks"

[[stages]]
name = "surcharge off"
height = -0.5
start = "60 weeks"
end = "61 weeks"

[[dependence]]
between = ["soft clay.Cc", "soft clay.Cs"]
rank_correlation = 0.6

[[limits]]
name = "residual"
quantity = "settlement"
between = ["61 weeks", "30 years"]
not_more_than = 0.10

[[limits]]
name = "slip"
quantity = "slip_safety"
not_less_than = 1.0
"""


@pytest.fixture
def base_text() -> str:
    """Text of a sound scenario."""
    return BASE
