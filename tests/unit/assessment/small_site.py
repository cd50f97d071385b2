"""Text of a small scenario that the tests of this folder share."""

TEXT = """
format = 1
title = "Test bank"
seed = 5
realisations = 2048
horizon = 10

[site]
water_table = 0.8
base = "drained"

[[layers]]
name = "clay"
soil = "clay"
thickness = { dist = "normal", mean = 4.0, sd = 0.3 }
unit_weight = 16.0
void_ratio = 1.8
lambda = { dist = "lognormal", mean = 0.30, cov = 0.15 }
kappa = { dist = "lognormal", mean = 0.04, cov = 0.20 }
preconsolidation = { pop = { dist = "lognormal", mean = 15, cov = 0.30 } }
M = { dist = "normal", mean = 1.0, cov = 0.06 }
permeability = { k = { dist = "lognormal", mean = 3e-9, cov = 0.6 }, ck = 0.9 }

[[layers]]
name = "sand"
soil = "granular"
thickness = 2.0
unit_weight = 19.0
constrained_modulus = "20 MPa"
phi = 33

[load]
shape = "embankment"
crest_width = 8
side_slope = 2
fill_unit_weight = { dist = "normal", mean = 19, cov = 0.05 }
fill_phi = 34

[[stages]]
name = "fill"
height = 1.8
start = 0
end = "6 weeks"

[[stages]]
name = "trim"
height = -0.3
start = "1 year"
end = "54 weeks"

[[dependence]]
between = ["clay.lambda", "clay.kappa"]
rank_correlation = 0.6

[model_error]
settlement = { dist = "lognormal", mean = 1.0, cov = 0.15 }

[[limits]]
name = "settlement"
quantity = "settlement"
at = "10 years"
not_more_than = 0.30
target_probability = 0.05
cost_if_exceeded = 1000

[[limits]]
name = "residual"
quantity = "settlement"
between = ["54 weeks", "10 years"]
not_more_than = 0.02

[[limits]]
name = "slip"
quantity = "slip_safety"
not_less_than = 0.8
target_probability = 0.01

[[limits]]
name = "degree"
quantity = "degree_of_consolidation"
at = "1 year"
not_less_than = 0.8

[[limits]]
name = "time"
quantity = "time_to_consolidation"
degree = 0.9
not_more_than = "2 years"
"""
