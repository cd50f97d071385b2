"""Small scenarios for the tests of the ground, written as a user would write them."""

from dataclasses import replace

import numpy as np

from probsoil.ground.site_model import SiteModel, site_model
from probsoil.scenario import Scenario, parse_scenario


def clay(name, thickness, **keys):
    """Text of a clay layer; keys as in a scenario file, `lam` for lambda, values as TOML text or numbers."""
    given = {
        "unit_weight": 16.0,
        "void_ratio": 1.8,
        "lam": 0.3,
        "kappa": 0.04,
        "preconsolidation": "{ ocr = 1.0 }",
        "M": 1.0,
        "permeability": "{ cv = 1.5 }",
    } | keys
    return _layer(name, "clay", thickness, given)


def sand(name, thickness, **keys):
    """Text of a granular layer."""
    given = {"unit_weight": 19.0, "constrained_modulus": '"40 MPa"', "phi": 32} | keys
    return _layer(name, "granular", thickness, given)


def _layer(name, soil, thickness, given):
    lines = [f'name = "{name}"', f'soil = "{soil}"', f"thickness = {thickness}"]
    lines += [
        f"{'lambda' if key == 'lam' else key} = {value}" for key, value in given.items() if value is not None
    ]
    return "\n".join(["[[layers]]", *lines])


def stage(name, start, end, *, pressure=None, height=None):
    """Text of a stage."""
    amount = f"pressure = {pressure}" if height is None else f"height = {height}"
    return f'[[stages]]\nname = "{name}"\nstart = {start}\nend = {end}\n{amount}'


AREA = '[load]\nshape = "area"\nsubmergence = false'
LIMIT = '[[limits]]\nname = "in the end"\nquantity = "settlement"\nat = {horizon}\nnot_more_than = 1'


def scenario(
    layers,
    stages,
    *,
    load=AREA,
    water_table=0.0,
    base="undrained",
    base_head=None,
    horizon=30.0,
    limits=None,
) -> Scenario:
    """Scenario of layers and stages given as text."""
    head = f'format = 1\ntitle = "case"\nseed = 1\nhorizon = {horizon}'
    ground = f'[site]\nwater_table = {water_table}\nbase = "{base}"\nmode_factor = 1.0'
    ground += "" if base_head is None else f"\nbase_head = {base_head!r}"
    tail = [LIMIT.format(horizon=horizon)] if limits is None else limits
    return parse_scenario("\n".join([head, ground, *layers, load, *stages, *tail]), file="case.toml")


def central(case: Scenario):
    """Every quantity at its mean."""
    return {quantity.address: quantity.distribution.expectation for quantity in case.quantities()}


def refined(case: Scenario, refine, *, also=()) -> SiteModel:
    """Site with finer cells and steps, its time axis holding some further times."""
    site = site_model(case, refine=refine)
    return replace(site, times=np.unique(np.concatenate([site.times, np.asarray(also, dtype=float)])))
