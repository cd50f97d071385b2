"""The tables a laboratory fills in: their names and their columns."""

from probsoil.laboratory.columns import Column, TableLayout

_TEST = Column(name="test", meaning="name of the test, as in its table of specimens", kind="text")
_OWN_NAME = Column(name="test", meaning="name of the test, found nowhere else on the site", kind="text")
_PROFILE = Column(
    name="test",
    meaning="name of the profile where a hole has several; else left out",
    kind="text",
    required=False,
)
_HOLE = Column(name="hole", meaning="borehole or sounding", kind="text")
_DEPTH = Column(
    name="depth", meaning="below ground level", kind="length", unit="m", low=0.0, typical=(0.0, 300.0)
)
_STRATUM = Column(
    name="stratum",
    meaning="name of the ground; else that of the table strata at this depth",
    kind="text",
    required=False,
)
_INCREMENT = Column(
    name="increment", meaning="number of the increment, rising in the order tested", kind="whole number"
)


def _pressure(name: str, meaning: str, typical: tuple[float, float], **more: bool | float | str) -> Column:
    return Column(name=name, meaning=meaning, kind="pressure", unit="kPa", typical=typical, **more)  # type: ignore[arg-type]


def _strain(name: str, meaning: str, *, required: bool) -> Column:
    return Column(
        name=name,
        meaning=meaning,
        kind="number",
        unit="-",
        usual="%",
        required=required,
        low=-0.6,
        high=0.6,
        typical=(0.0025, 0.6) if required else None,
    )


def _void_ratio(name: str, meaning: str, *, required: bool = True) -> Column:
    return Column(
        name=name,
        meaning=meaning,
        kind="number",
        unit="-",
        bare=True,
        required=required,
        positive=True,
        high=30.0,
    )


_GROUND = (
    TableLayout(
        name="holes",
        about="ground",
        meaning="one row per borehole or sounding; the table may be left out",
        columns=(
            _HOLE,
            Column(
                name="x", meaning="plan position, grid of the site", kind="length", unit="m", required=False
            ),
            Column(
                name="y", meaning="plan position, grid of the site", kind="length", unit="m", required=False
            ),
            Column(
                name="final depth",
                meaning="depth of the hole; tests below it are refused",
                kind="length",
                unit="m",
                required=False,
                low=0.0,
                typical=(0.2, 500.0),
            ),
        ),
        key=("hole",),
    ),
    TableLayout(
        name="strata",
        about="ground",
        meaning="one row per stratum of a hole; the table may be left out",
        columns=(
            _HOLE,
            Column(name="top", meaning="depth of its top", kind="length", unit="m", low=0.0),
            Column(name="base", meaning="depth of its base", kind="length", unit="m", low=0.0),
            Column(name="stratum", meaning="name of the ground", kind="text"),
        ),
        key=("hole", "top"),
    ),
    TableLayout(
        name="plasticity",
        about="ground",
        meaning="one row per index test; used where a row of the table vane has no plasticity index, the "
        "nearest in the same hole within 1 m; the table may be left out",
        columns=(
            _HOLE,
            _DEPTH,
            Column(
                name="plasticity index",
                meaning="liquid less plastic limit",
                kind="number",
                unit="%",
                low=0.0,
                typical=(1.0, 800.0),
            ),
        ),
        key=("hole", "depth", "plasticity index"),
    ),
)
_OEDOMETER = (
    TableLayout(
        name="oedometer specimens",
        about="oedometer",
        meaning="one row per specimen",
        columns=(
            _OWN_NAME,
            _HOLE,
            _DEPTH,
            _STRATUM,
            _void_ratio("initial void ratio", "before loading"),
            Column(
                name="initial height",
                meaning="of the specimen",
                kind="length",
                unit="mm",
                positive=True,
                typical=(5.0, 300.0),
            ),
            Column(
                name="drainage",
                meaning="faces at which water leaves, both where left out",
                kind="text",
                required=False,
                choices=("both faces", "one face"),
            ),
            Column(
                name="void ratio reading error",
                meaning="standard deviation of one reading; none where left out",
                kind="number",
                unit="-",
                bare=True,
                required=False,
                low=0.0,
                high=0.5,
            ),
            _pressure(
                "preconsolidation stress",
                "as the laboratory states it; shown beside, never used",
                (1.0, 2e4),
                required=False,
                positive=True,
            ),
        ),
        key=("test",),
    ),
    TableLayout(
        name="oedometer increments",
        about="oedometer",
        meaning="one row per increment, unloading too, in the order tested",
        columns=(
            _TEST,
            _INCREMENT,
            _pressure("stress", "effective vertical stress at the end", (20.0, 2e4), positive=True),
            _void_ratio("void ratio", "at the end of the increment"),
            Column(
                name="cv",
                meaning="coefficient of consolidation as the laboratory states it; shown beside",
                kind="coefficient of consolidation",
                unit="m2/year",
                required=False,
                positive=True,
                typical=(1e-3, 1e4),
            ),
        ),
        key=("test", "increment"),
    ),
    TableLayout(
        name="oedometer readings",
        about="oedometer",
        meaning="one row per reading of the dial; increments without readings are left out",
        columns=(
            _TEST,
            _INCREMENT,
            Column(name="time", meaning="since the increment was applied", kind="time", unit="min", low=0.0),
            Column(
                name="compression",
                meaning="since the reading before the increment, positive when the specimen grows shorter",
                kind="length",
                unit="mm",
            ),
        ),
        key=("test", "increment", "time"),
    ),
)
_TRIAXIAL = (
    TableLayout(
        name="triaxial specimens",
        about="triaxial",
        meaning="one row per specimen",
        columns=(
            _OWN_NAME,
            _HOLE,
            _DEPTH,
            _STRATUM,
            Column(
                name="kind",
                meaning="consolidated isotropically (CI) or not (CA), undrained (U) or drained (D), "
                "compression (C) or extension (E); UU",
                kind="text",
                choices=("CIUC", "CAUC", "CIUE", "CAUE", "CIDC", "CADC", "UU"),
            ),
            _pressure(
                "axial stress",
                "effective, end of consolidation; not of UU",
                (1.0, 1e4),
                required=False,
                positive=True,
            ),
            _pressure(
                "radial stress",
                "effective, end of consolidation; not of UU",
                (1.0, 1e4),
                required=False,
                positive=True,
            ),
            _void_ratio("void ratio", "end of consolidation", required=False),
        ),
        key=("test",),
    ),
    TableLayout(
        name="triaxial readings",
        about="triaxial",
        meaning="one row per reading during shear; one row, at failure, will do",
        columns=(
            _TEST,
            _strain("axial strain", "from the start of shear, compression positive", required=True),
            _pressure("deviator stress", "axial less radial stress", (0.5, 2e4)),
            _pressure(
                "pore pressure change",
                "from the start of shear; undrained tests",
                (0.0, 2e4),
                required=False,
            ),
            _strain(
                "volumetric strain",
                "from the start of shear, compression positive; drained tests",
                required=False,
            ),
        ),
        key=("test", "axial strain", "deviator stress"),
    ),
)
_FIELD = (
    TableLayout(
        name="vane",
        about="vane",
        meaning="one row per field vane test",
        columns=(
            _HOLE,
            _PROFILE,
            _DEPTH,
            _pressure("strength", "peak undrained strength", (1.0, 1e3), positive=True),
            _pressure("remoulded strength", "after many turns", (0.0, 1e3), required=False, low=0.0),
            Column(
                name="plasticity index",
                meaning="of the clay at this depth",
                kind="number",
                unit="%",
                required=False,
                low=0.0,
                typical=(1.0, 800.0),
            ),
            Column(
                name="corrected",
                meaning="whether the strengths of the profile are corrected for rate and anisotropy",
                kind="text",
                required=False,
                choices=("yes", "no"),
            ),
        ),
        key=("hole", "test", "depth", "strength"),
    ),
    TableLayout(
        name="cone",
        about="cone",
        meaning="one row per reading",
        columns=(
            _HOLE,
            _PROFILE,
            _DEPTH,
            _pressure("cone resistance", "as measured, q_c", (100.0, 1e5), low=0.0, usual="MPa"),
            _pressure("sleeve friction", "f_s", (0.0, 1e4), required=False),
            _pressure("pore pressure", "behind the cone, u_2", (0.0, 1e4), required=False),
            Column(
                name="area ratio",
                meaning="net area ratio of the cone, the same in all rows of a sounding",
                kind="number",
                unit="-",
                bare=True,
                required=False,
                positive=True,
                high=1.0,
            ),
        ),
        key=("hole", "test", "depth"),
    ),
)
LAYOUTS: tuple[TableLayout, ...] = (*_GROUND, *_OEDOMETER, *_TRIAXIAL, *_FIELD)


def layout_of(name: str) -> TableLayout | None:
    """Return the table that the name of a file or of a sheet tells.

    Parameters
    ----------
    name : str
        Name without folder and ending; case, blanks, hyphens and underscores make no difference.

    Returns
    -------
    layout : TableLayout or None
        None where the name holds no table's name, or several.
    """
    words = f" {plain(name)} "
    found = [layout for layout in LAYOUTS if f" {layout.name} " in words]
    return found[0] if len(found) == 1 else None


def plain(text: str) -> str:
    """Return a name with its words in small letters and one blank between them.

    Parameters
    ----------
    text : str
        Such as ``Oedometer_Increments``.

    Returns
    -------
    plain : str
        Such as ``oedometer increments``.
    """
    return " ".join(text.replace("_", " ").replace("-", " ").casefold().split())
