"""What the consolidation needs to know of fill that is added so that its level stays."""

from probsoil.ground.applied_load import LoadedGround, fill_weight
from probsoil.ground.granular_settlement import granular_at_knots
from probsoil.ground.profile import Values
from probsoil.ground.rows import chosen
from probsoil.ground.site_model import SiteModel
from probsoil.ground.top_up import LevelHeld


def level_held(site: SiteModel, values: Values, ground: LoadedGround) -> LevelHeld | None:
    """Return what the consolidation needs to know of fill that holds its level.

    Parameters
    ----------
    site : SiteModel
        Until when.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.
    ground : LoadedGround
        The ground before loading and the added stress.

    Returns
    -------
    held : LevelHeld or None
        None where no level is held.
    """
    if site.hold_level_until is None:
        return None
    load = ground.load
    weight = fill_weight(values, len(load.spread))
    one_metre = weight[:, None] * load.spread
    return LevelHeld(
        until=site.hold_level_until,
        unit_weight=weight,
        spread=chosen(load.spread, ground.clay),
        granular=granular_at_knots(site, values, ground, load.stress),
        granular_share=granular_at_knots(site, values, ground, one_metre[None])[0],
    )
