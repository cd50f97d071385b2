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

_NO_DISTORTION = (
    "Vertical compression only: no lateral movement, no settlement from shear distortion of the clay.",
)
_DISTORTION = (
    "Consolidation is vertical. Besides, clay that has an undrained modulus settles at once with the load, "
    "and rises with its removal, by distortion at constant volume: strains from the stresses in a "
    "homogeneous elastic half-space over the modulus of each depth (superposition), which stays that of "
    "before the works. That is settlement, and no part of the degree of consolidation. Local yield, which "
    "makes it larger where the safety against failure is small, is left out.",
)
_GRANULAR = (
    "Granular layers settle at once with the load, and rise with its removal: added vertical stress over the "
    "constrained modulus, without lateral strain.",
)
_GROUND = (
    "Clay compresses along kappa up to the current preconsolidation stress and along lambda beyond it.",
    "Ground level and granular layers drain freely; strains may be large (finite strain), and permeability "
    "falls as the clay compresses.",
    "Each parameter is one representative value per layer, the same over the whole layer in a realisation.",
    "The effective stress in situ is nowhere taken below 1 kPa.",
)
_STATIONS = (
    "At each station every layer has an average of its own: what is not known of the layer is the same at "
    "all of them; what varies from point to point (inherent_cov, averaged over the layer's thickness) is "
    "correlated between them by exp(-2 d / horizontal_scale), d being the distance in plan. A parameter "
    "without variability of its own varies between stations as far as a rank correlation ties it to one that "
    "has. Thickness and everything outside the layers do not vary beyond what is stated.",
    "Stations settle by themselves: neither the fill nor a structure across them evens the differences out. "
    "One error of the calculation holds for all of them. A distortion is the difference of settlement over "
    "the distance in plan; the tilt is in it unless the limit takes it off.",
    "Slip, bearing and degree of consolidation are those of one section: below the centreline or centre, "
    "with the layer averages and thicknesses of the first station.",
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
_NET = (
    "The pressure on the foundation is net: in excess of the weight of soil dug out, whose removal is not "
    "computed by itself.",
)
_EXCAVATED = (
    "Soil is dug out over the plan of the foundation in the stages that say so; below its base the effective "
    "stress falls by what that soil weighs, less the water in it, spread like the load, and the clay swells. "
    "Water stands in the excavation and presses under the base as high as the water table. What is placed "
    "first takes the place of that water, then reloads the clay. Heave is settlement below zero.",
    "Bearing is looked at with the pressure beyond the soil dug out and the water; failure of the bottom or "
    "the sides of the excavation is not looked at.",
)
_REPLACED = (
    "The ground below the whole base of the load is dug out in the stages that say so and replaced by its "
    "fill: below the bottom the effective stress falls by what that ground weighs, less the water in it, and "
    "the clay swells; what is placed first takes the place of the water, then reloads. Water stands in the "
    "pit as high as the water table. Settlement is that of the bottom of the pit.",
)
_NO_SLIP = ("Slip is not looked at, neither through the replaced ground nor of the sides of the pit.",)
_WORKS = (
    "What is uncertain of the works (heights, pressures, widths, depths, drains) has one value in each "
    "realisation, the same along the whole load. When things are looked at follows from the means.",
)
_FOUNDATION = (
    "Stress from the foundation is that of a uniform pressure on a homogeneous elastic half-space "
    "(Boussinesq), from its base down; the clay above the base gets none. The foundation is flexible; "
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
_SEEPAGE = (
    "Before the works water seeps steadily and vertically between the water table and the levels that are "
    "given; clay layers share the loss of head by thickness over permeability, granular layers lose none. "
    "Consolidation runs on the pressure in excess of that state, which the works leave as it is; suction is "
    "neglected.",
)
_EXCESS = (
    "Clay that has not finished consolidating when the works begin starts with the excess pore pressure "
    "given: its effective stress, and with it ocr, pop and strength, are those of that time. Settlement "
    "counts from then and holds what that pressure still brings, with load or without; so does the degree "
    "of consolidation. Beyond the toe no strength is gained from it.",
)
_SUBMERGENCE = (
    "The water table keeps its level: what sinks below it, first the ground above it and then the fill, "
    "loses the weight of the water it displaces.",
)

_LEVEL_HELD = (
    "Until its stated time the level of the fill is held: fill is added as the ground settles, so that its "
    "thickness on the centreline is the designed height and the settlement together. It weighs as the fill "
    "does, spreads its stress as the load does at its greatest height, and is taken to be everywhere in the "
    "same proportion to the fill above it; its volume follows from that. Afterwards none is added.",
    "In slip the fill stands as high as designed above the ground as it was; what was added below that "
    "drives with its whole weight, also under water, and resists nothing. While fill is added there is no "
    "creep.",
)

_FURTHER = (
    "Further loads add their stress at the reported point (Boussinesq, superposed). A limit that names one "
    "is computed as if that were the load, on the same realisations and without drains.",
    "The strength that the clay gains under further loads at the reported point counts in slip and bearing "
    "of the load; under its slope or edge it is reduced as that from the load itself. No failure runs "
    "through two loads, and a further load neither drives a slip nor holds one back.",
)
_FURTHER_SUNK = (
    "Below further loads the ground is taken to have sunk below the water table as at the reported point.",
)


def assumptions(site: SiteModel, *, stations: int = 0) -> tuple[str, ...]:
    """Return the assumptions behind a result, in words.

    Parameters
    ----------
    site : SiteModel
        Which models were used.
    stations : int, [-]
        Number of stations.

    Returns
    -------
    statements : tuple of str
        One sentence or two each.
    """
    load: tuple[str, ...] = _AREA if site.embankment is None else _EMBANKMENT
    if site.excavates and site.foundation is None:
        load = (*_AREA, *_REPLACED) if site.embankment is None else (_EMBANKMENT[0], *_REPLACED, *_NO_SLIP)
    if site.embankment is not None and site.embankment.berm_width > 0.0:
        load += _BERMS
    if np.isfinite(site.traffic_from):
        load += (*_TRAFFIC, f"It counts from {site.traffic_from:.3g} years on.")
    if site.foundation is not None:
        load = (*_FOUNDATION, *(_EXCAVATED if site.excavates else _NET))
    base = (
        "What lies below the last layer "
        + ("drains freely." if site.base_drained else "lets no water through.")
        + " It does not settle and no slip passes through it.",
    )
    creep = _CREEP if any(layer.creeps for layer in site.layers) else _NO_CREEP
    flow = _VERTICAL if site.drains is None else _DRAINS
    ground = (
        *(_DISTORTION if site.distorts else _NO_DISTORTION),
        *_GROUND,
        *(_STATIONS if stations else ()),
        *(() if all(layer.is_clay for layer in site.layers) else _GRANULAR),
        *(_SEEPAGE if site.seeps else ()),
        *(_EXCESS if site.excess_layers else ()),
    )
    submergence = _SUBMERGENCE if site.submergence else ()
    held = () if site.hold_level_until is None else _LEVEL_HELD
    works = () if site.works is None else _WORKS
    return (*ground, *creep, *flow, *load, *_further(site), *works, *held, *submergence, *base)


def _further(site: SiteModel) -> tuple[str, ...]:
    if not site.further_loads:
        return ()
    return (*_FURTHER, *_FURTHER_SUNK) if site.submergence else _FURTHER
