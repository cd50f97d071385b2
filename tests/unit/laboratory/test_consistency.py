"""Columns that contradict each other: refused where that is certain, asked about where it is likely."""

from pathlib import Path

import pytest
from sheet_samples import SITE, kept, refused, the_fault, write

from probsoil.laboratory.reading import read_sheets

SHEAR = "test,axial strain (%),deviator stress (kPa),pore pressure change (kPa)\n"


def sheared(*rows: tuple[float, float, float]) -> str:
    return SHEAR + "".join(f"T1,{','.join(map(str, row))}\n" for row in rows)


@pytest.mark.parametrize(
    ("changed", "head", "words", "hint"),
    [
        (
            {"triaxial_readings": sheared((0, 0, 0), (0.5, 9, 4), (4, 13, 9))},
            "triaxial_readings.csv:2:3: deviator stress (kPa): ",
            '"T1" has a first deviator stress of 0 kPa, but axial less radial stress at the end of '
            "consolidation is 15",
            "add 15 kPa to every reading",
        ),
        (
            {"triaxial_readings": sheared((0, 15, 200), (0.5, 24, 204), (4, 28, 209))},
            "triaxial_readings.csv:2:4: pore pressure change (kPa): ",
            'the pore pressure of "T1" has changed by 200 kPa before any strain',
            "200 kPa less in every reading",
        ),
        (
            {"triaxial_readings": sheared((0.5, 24, 204), (4, 28, 209))},
            "triaxial_readings.csv:2:4: pore pressure change (kPa): ",
            'no reading of "T1" leaves a mean effective stress above 0 kPa',
            "is the back pressure in it?",
        ),
        (
            {
                "triaxial_specimens": SITE["triaxial_specimens"].replace("CAUC", "CADC"),
                "triaxial_readings": sheared((0.5, -240, 0), (4, -280, 0)),
            },
            "triaxial_readings.csv:2:3: deviator stress (kPa): ",
            'no reading of "T1" leaves a mean effective stress above 0 kPa',
            "mend the stresses",
        ),
        (
            {"oedometer_increments": SITE["oedometer_increments"].replace("void ratio,", "void ratio (%),")},
            "oedometer_increments.csv:2:4: void ratio (%): ",
            'the first increment of "O1" has a void ratio of 0.0208, but it was 2.1 before loading',
            "is one of the two in %?",
        ),
        (
            {"oedometer_specimens": SITE["oedometer_specimens"].replace("void ratio", "void ratio (%)")},
            "oedometer_increments.csv:2:4: void ratio: ",
            "has a void ratio of 2.08, but it was 0.021 before loading",
            "is one of the two in %?",
        ),
        (
            {
                "oedometer_readings": SITE["oedometer_readings"]
                .replace("0.58", "1.16")
                .replace("0.3\n", "0.6\n")
                .replace("0.25,0.1\n", "0.25,0.2\n")
            },
            "oedometer_readings.csv:4:4: compression (mm): ",
            'increment 3 of "O1" compresses the specimen by 1.16 mm by the dial, but by 0.581 mm by '
            "its void ratios",
            "since the reading before the increment?",
        ),
    ],
)
def test_contradiction_is_a_mistake(
    tmp_path: Path, changed: dict[str, str], head: str, words: str, hint: str
) -> None:
    folder = write(tmp_path, **changed)
    (fault,) = refused(folder)
    assert str(fault).startswith(str(folder / head))
    assert words in fault.message
    assert hint in (fault.hint or "")
    site = kept(folder)
    assert len(site.vanes) == 1  # the rest is used
    assert len(site.triaxials) == (0 if "triaxial" in head else 1)


@pytest.mark.parametrize(
    ("changed", "words"),
    [
        (
            {"triaxial_readings": sheared((0.1, 4, 1), (0.5, 9, 4), (4, 13, 9))},
            'triaxial_readings.csv, row 2: "T1" has a first deviator stress of 4 kPa',
        ),
        (
            {"triaxial_readings": sheared((0, 11.5, 0), (0.5, 24, 4), (4, 28, 9))},
            'triaxial_readings.csv, row 2: "T1" has a first deviator stress of 11.5 kPa',
        ),
        (
            {"triaxial_readings": sheared((0, 15, 0), (0.5, 24, 4), (4, 28, 60))},
            'triaxial_readings.csv, row 4: readings of "T1" leave no mean effective stress (1 of 3)',
        ),
        (
            {"triaxial_readings": sheared((0, 15, 0), (0.5, 24, -4), (4, 28, -9))},
            'row 2: the pore pressure of "T1" falls in compression from its first reading, to -9 '
            "kPa: is its sign",
        ),
        (
            {
                "triaxial_specimens": ("CAUC", "CAUE"),
                "triaxial_readings": sheared((0.1, 20, 1), (4, -9, 9)),
            },
            'triaxial_readings.csv, row 2: "T1" has a first deviator stress of 20 kPa',
        ),
        (
            {"triaxial_specimens": ("CAUC", "CIUC")},
            'triaxial_specimens.csv, row 2: "T1" is consolidated isotropically by its kind, CIUC, '
            "but under 40 and 25",
        ),
        (
            {"oedometer_specimens": ("2.1,20", "2.0,20")},
            'oedometer_increments.csv, row 2: the first increment of "O1" has a void ratio of 2.08, '
            "but it was 2",
        ),
        (
            {"oedometer_specimens": ("2.1,20", "4.0,20"), "oedometer_readings": ("0.58", "0.36")},
            'oedometer_increments.csv, row 2: the first increment of "O1" has a void ratio of 2.08, '
            "but it was 4",
        ),
        (
            {"oedometer_readings": ("1440,0.58", "1440,0.31")},
            'row 4: increment 3 of "O1" compresses the specimen by 0.31 mm by the dial, but by 0.581 mm',
        ),
        (
            {"oedometer_readings": ("time (min)", "time (s)")},
            'oedometer_readings.csv, row 2: increments of "O1" are read for 24 min: is the unit of '
            "time right?",
        ),
        (
            {"oedometer_readings": ("O1,3,1440", "O1,3,86400")},
            'increments of "O1" are read for 8.64e+04 min: is the unit of time right?',
        ),
    ],
)
def test_doubtful_numbers_are_used_and_asked_about(
    tmp_path: Path, changed: dict[str, str | tuple[str, str]], words: str
) -> None:
    site = read_sheets(write(tmp_path, **changed))
    (remark,) = site.remarks
    assert words in remark
    assert len(site.oedometers) == len(site.triaxials) == 1


@pytest.mark.parametrize(
    "changed",
    [
        {},
        {"triaxial_readings": sheared((4, 2, 9))},  # the state at failure alone need not tell the start
        {"triaxial_specimens": ("CAUC", "CAUE"), "triaxial_readings": sheared((0.1, 5, -2), (4, -20, -9))},
        {"triaxial_specimens": ("CAUC,40,25", "UU,,"), "triaxial_readings": sheared((0, 0, 90), (4, 9, 90))},
        {
            "triaxial_readings": sheared((0, 15, 0), (0.5, 24, 4), (4, 28, -12))
        },  # stiff clay that dilates later
        {"oedometer_readings": ("O1,3,1440,0.58", "O1,3,1440,0.66")},
    ],
)
def test_what_agrees_is_let_pass(tmp_path: Path, changed: dict[str, str | tuple[str, str]]) -> None:
    assert read_sheets(write(tmp_path, **changed)).remarks == ()


def test_dial_is_not_compared_across_a_missing_increment(tmp_path: Path) -> None:
    increments = SITE["oedometer_increments"].replace("O1,2,25,2.050,6\n", "O1,2,25,x,6\n")
    fault = the_fault(write(tmp_path, oedometer_increments=increments))
    assert fault.message == "this is not a number"
