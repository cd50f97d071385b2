"""Fields that loads share: widths, slopes and depths, which may be uncertain."""

from probsoil.scenario.fields import Uncertain


def width_of_top() -> Uncertain:
    """Return the field of the width of an embankment's top.

    Returns
    -------
    field : Uncertain
        Above 0.
    """
    return Uncertain(
        kind="length",
        low=0.0,
        high=1000.0,
        open_low=True,
        source="by definition",
        meaning="width of the top of the embankment at its greatest height",
        of_works=True,
    )


def slope_run() -> Uncertain:
    """Return the field of the run of a side slope.

    Returns
    -------
    field : Uncertain
        0 for a vertical side.
    """
    return Uncertain(
        kind="number",
        low=0.0,
        high=20.0,
        source="common practice",
        meaning="horizontal run of the side slope per unit of rise; 0 is a vertical side",
        of_works=True,
    )


def side(meaning: str) -> Uncertain:
    """Return the field of a side or diameter.

    Parameters
    ----------
    meaning : str
        What it is.

    Returns
    -------
    field : Uncertain
        From 0.1 m.
    """
    return Uncertain(
        kind="length", low=0.1, high=1000.0, source="common practice", meaning=meaning, of_works=True
    )


def depth_of_base(meaning: str) -> Uncertain:
    """Return the field of the depth of a base below ground level.

    Parameters
    ----------
    meaning : str
        What goes with it.

    Returns
    -------
    field : Uncertain
        0 at ground level.
    """
    return Uncertain(
        kind="length", low=0.0, high=50.0, source="common practice", meaning=meaning, of_works=True
    )
