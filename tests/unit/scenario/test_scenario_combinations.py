"""What is not computed together is refused, with the key and what it cannot stand beside."""

import pytest

from probsoil.errors import ScenarioError
from probsoil.scenario import parse_scenario, starter_text

FURTHER = """
[[further_loads]]
name = "shed"
shape = "area"
"""
SHED = """
[[stages]]
name = "shed"
load = "shed"
pressure = 10
start = 0
end = 0.1
"""
PIT = """
[[stages]]
name = "pit"
excavate = 1.0
start = 0
end = 0.05
"""


def clay_with(text, key):
    """The same, with a key in its last clay."""
    head, clay, rest = text.rpartition('soil = "clay"\n')
    return f"{head}{clay}{key}\n{rest}"


def faults(text):
    with pytest.raises(ScenarioError) as caught:
        parse_scenario(text, file="any.toml")
    return [fault for fault in caught.value.faults if "not computed together" in fault.message]


def first_stage(text, stage):
    return text.replace("\n[[stages]]", f"{stage}\n[[stages]]", 1)


MODULUS = "undrained_modulus = { ratio = 300 }"
HELD = ('shape = "embankment"', 'hold_level_until = 1.0\nshape = "embankment"')
EMBANKMENT, FOOTING = starter_text("embankment"), starter_text("footing")


@pytest.mark.parametrize(
    ("text", "path", "said"),
    [
        (
            clay_with(first_stage(EMBANKMENT, FURTHER + SHED), MODULUS),
            "undrained_modulus",
            "undrained distortion and further_loads",
        ),
        (
            clay_with(EMBANKMENT.replace(*HELD), MODULUS),
            "undrained_modulus",
            "undrained distortion and hold_level_until",
        ),
        (
            clay_with(first_stage(FOOTING, PIT), MODULUS),
            "undrained_modulus",
            "undrained distortion and a stage that excavates",
        ),
        (
            clay_with(first_stage(FOOTING, PIT), "initial_excess = { pressure = 3 }"),
            "initial_excess",
            "pore pressure that is not at rest and a stage that excavates",
        ),
        (
            first_stage(FOOTING, PIT).replace("[site]\n", "[site]\nbase_head = 0.2\n"),
            "base_head",
            "pore pressure that is not at rest and a stage that excavates",
        ),
        (
            EMBANKMENT.replace(*HELD) + '\n[[stations]]\nname = "toe"\nx = 9.0\n',
            "x",
            "a station off the centreline and hold_level_until",
        ),
        (
            EMBANKMENT.replace(*HELD) + "\n[station_line]\nfrom = 0\nto = 40\nnumber = 3\nx = 4\n",
            "x",
            "a station off the centreline and hold_level_until",
        ),
    ],
)
def test_refused_with_the_key_and_the_other(text, path, said):
    found = faults(text)
    assert len(found) == 1
    assert said in found[0].message
    assert path in found[0].key
    assert "one of the two" in found[0].allowed


@pytest.mark.parametrize(
    "text", [EMBANKMENT, FOOTING, EMBANKMENT.replace(*HELD), clay_with(FOOTING, MODULUS)]
)
def test_each_alone_is_taken(text):
    parse_scenario(text, file="any.toml")
