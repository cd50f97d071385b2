"""What every result says about itself: assumptions of the models and cautions to the reader."""

import numpy as np

from probsoil.ground.site_model import SiteModel

CAUTIONS = (
    "This is an aid to judgement, not a design. Local codes and standards decide what must be shown, and a "
    "licensed engineer who knows the site decides what is built.",
    "A probability here is only as good as the distributions that were put in. Parameters that rest on few "
    "or no tests make it an expression of belief, not of frequency.",
    "The interval on a probability covers the limited number of realisations only. It covers neither a "
    "wrong distribution, nor a layer that was not found, nor a way of failing that is not modelled.",
    "Drained and long-term stability, lateral spreading, seismic loading and two-dimensional flow of water "
    "are outside this calculation.",
)

SHEET_CAUTIONS = (
    CAUTIONS[0],
    "This is one calculation with one value for every parameter. It says nothing of how likely another "
    "outcome is, and it is not the mean of the possible outcomes.",
    "The error of the models, measured over computed, is not applied here.",
    CAUTIONS[-1],
)
"""What the reader of a calculation sheet must bear in mind."""

_GROUND = (
    "Vertical compression only: no lateral movement, no settlement from shear distortion of the clay.",
    "Clay compresses along kappa up to the current preconsolidation stress and along lambda beyond it.",
    "Ground level and granular layers drain freely; strains may be large (finite strain), and permeability "
    "falls as the clay compresses.",
    "Each parameter is one representative value per layer, the same over the whole layer in a realisation.",
    "The effective stress in situ is nowhere taken below 1 kPa.",
)
_VERTICAL = ("Water flows vertically.",)
_DRAINS = (
    "Water flows vertically and to the drains, with equal vertical strain around each; smear is a ring of "
    "one permeability.",
)
_NO_CREEP = ("Creep (secondary compression) is not included.",)
_CREEP = (
    "Creep starts in each drainage segment when it has reached 95 % of its consolidation under the load "
    "of the time, in proportion to the logarithm of its age, and less where a removed surcharge has left the "
    "clay overconsolidated; a later increase makes the clay younger, the more the larger it is.",
)
_EMBANKMENT = (
    "Stress from the embankment is that of a trapezoidal strip load on a homogeneous elastic half-space; "
    "settlement is that of the centreline.",
    "Slip surfaces are circles in plane strain through fill and ground; undrained strength follows from M, "
    "lambda, kappa and the current stresses, times the mode factor, and grows as the clay consolidates: "
    "under the crest as computed, under the slope in proportion to the stress there, beyond the toe not "
    "at all.",
    "Fill and granular layers resist by friction on the normal stress of the ordinary method of slices; "
    "circles leave on the slope, at the toe or beyond, and never go below the last layer. They reach at "
    "least 0.2 m into the ground; circles wholly in the fill are looked at only where it has cohesion.",
)
_BERMS = (
    "Berms rise with the fill until they have their own height. Their stress is added to that of the "
    "embankment (superposed trapezia); under them the clay gains strength in proportion to the stress there.",
)
_TRAFFIC = (
    "Traffic is a uniform pressure on the top that stands only where it drives a slip. It adds to friction "
    "in the fill below it, not in the ground, and causes no consolidation.",
)
_AREA = ("The load is taken as wide compared with the depth of the clay: every depth feels it in full.",)
_FOUNDATION = (
    "Stress from the foundation is that of a uniform pressure on a homogeneous elastic half-space "
    "(Boussinesq), from its base down; the clay above the base gets none. The pressure is net: in excess of "
    "the weight of soil dug out, whose removal is not computed by itself. The foundation is flexible; "
    "settlement is that of the reported point.",
    "Water leaves at the base of the foundation as at ground level, and flows vertically below it: "
    "sideways drainage, which hastens settlement under a small foundation, is left out.",
    "Bearing is undrained, on the strength below the edge of the foundation at that time, which follows "
    "from M, lambda, kappa and the current stresses, times the mode factor. The straight line that is "
    "nowhere above the strength within two widths below the base (level from one width on) and carries most "
    "goes into Davis and Booker's solution, with factors for shape and Skempton's for depth. A crust above "
    "that line raises the capacity in the proportion in which it raises what circular arcs carry.",
    "Deeper clay layers are checked in the same way under the load spread at 2 vertical to 1 horizontal; "
    "the least safety over the levels counts. A granular layer spreads the load and resists nothing itself.",
)
_SUBMERGENCE = (
    "The water table keeps its level: what sinks below it, first the ground above it and then the fill, "
    "loses the weight of the water it displaces.",
)


def assumptions(site: SiteModel) -> tuple[str, ...]:
    """Return the assumptions behind a result, in words.

    Parameters
    ----------
    site : SiteModel
        Which models were used.

    Returns
    -------
    statements : tuple of str
        One sentence or two each.
    """
    load: tuple[str, ...] = _AREA if site.embankment is None else _EMBANKMENT
    if site.embankment is not None and site.embankment.berm_width > 0.0:
        load += _BERMS
    if np.isfinite(site.traffic_from):
        load += (*_TRAFFIC, f"It counts from {site.traffic_from:.3g} years on.")
    if site.foundation is not None:
        load = _FOUNDATION
    base = (
        "What lies below the last layer "
        + ("drains freely." if site.base_drained else "lets no water through.")
        + " It does not settle and no slip passes through it.",
    )
    creep = _CREEP if any(layer.creeps for layer in site.layers) else _NO_CREEP
    flow = _VERTICAL if site.drains is None else _DRAINS
    return (*_GROUND, *creep, *flow, *load, *(_SUBMERGENCE if site.submergence else ()), *base)
