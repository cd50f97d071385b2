"""What every result says about itself: assumptions of the models and cautions to the reader."""

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

_GROUND = (
    "Vertical compression only: no lateral movement, no settlement from shear distortion of the clay.",
    "Clay compresses along kappa up to the current preconsolidation stress and along lambda beyond it; creep "
    "(secondary compression) is not included.",
    "Water flows vertically; ground level and granular layers drain freely; strains may be large "
    "(finite strain), and permeability falls as the clay compresses.",
    "Each parameter is one representative value per layer, the same over the whole layer in a realisation.",
    "The effective stress in situ is nowhere taken below 1 kPa.",
)
_EMBANKMENT = (
    "Stress from the embankment is that of a trapezoidal strip load on a homogeneous elastic half-space; "
    "settlement is that of the centreline.",
    "Slip surfaces are circles in plane strain through fill and ground; undrained strength follows from M, "
    "lambda, kappa and the current stresses, times the mode factor, and grows as the clay consolidates: "
    "under the crest as computed, under the slope in proportion to the stress there, beyond the toe not "
    "at all.",
    "Fill and granular layers resist by friction on the normal stress of the ordinary method of slices; "
    "circles leave at or beyond the toe and never go below the last layer.",
)
_AREA = ("The load is taken as wide compared with the depth of the clay: every depth feels it in full.",)
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
    load = _AREA if site.embankment is None else _EMBANKMENT
    base = (
        "What lies below the last layer "
        + ("drains freely." if site.base_drained else "lets no water through.")
        + " It does not settle and no slip passes through it.",
    )
    return (*_GROUND, *load, *(_SUBMERGENCE if site.submergence else ()), *base)
