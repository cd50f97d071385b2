"""Names of the scenario format that this version does not compute and therefore refuses."""

NOT_YET = "not computed in this version"

LATER_DISTRIBUTIONS = ("gamma", "gumbel", "discrete", "empirical", "percentiles")
LATER_SHAPES = ("strip", "rectangle", "circle")
LATER_QUANTITIES = ("differential_settlement", "angular_distortion", "bearing_safety")
# By the table the key stands in; "" is the top of the file.
LATER_KEYS: dict[str, tuple[str, ...]] = {
    "": ("drains", "stations", "evidence", "alternatives", "tests_on_offer", "investigation", "readings"),
    "layers": ("C_alpha_ratio", "C_alpha", "kh_kv", "drained"),
    "load": ("width", "length", "diameter", "radius", "depth"),
    "limits": ("station", "stations"),
}
