"""Names of the scenario format that this version does not compute and therefore refuses."""

NOT_YET = "not computed in this version"

# By the table the key stands in; "" is the top of the file.
LATER_KEYS: dict[str, tuple[str, ...]] = {
    "": ("alternatives", "tests_on_offer", "investigation", "readings"),
    "layers": ("drained",),
}
