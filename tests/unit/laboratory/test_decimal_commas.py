"""Decimal commas are read where semicolons part the cells and no number has a point, else refused."""

from pathlib import Path

import numpy as np
import pytest
from sheet_samples import SITE, refused, the_fault, write

from probsoil.laboratory.reading import read_sheets


def exported(text: str) -> str:
    """Return a table as a spreadsheet program of much of Europe writes it."""
    return text.replace(",", ";").replace(".", ",")


def test_site_with_decimal_commas_is_the_same_site(tmp_path: Path) -> None:
    usual = read_sheets(write(tmp_path / "usual"))
    found = read_sheets(write(tmp_path / "commas", **{name: exported(text) for name, text in SITE.items()}))
    for name in ("stress", "void_ratio", "reported_cv"):
        np.testing.assert_array_equal(getattr(found.oedometers[0], name), getattr(usual.oedometers[0], name))
    times = found.oedometers[0].time_readings[2]
    assert times is not None
    assert times.compression.tolist() == [0.1, 0.3, 0.58]
    assert found.cones[0].cone_resistance.tolist() == [250.0, 260.0]
    assert found.triaxials[0].place == usual.triaxials[0].place
    told = [
        remark for remark in found.remarks if remark.endswith("commas in numbers are read as decimal points")
    ]
    assert {Path(remark.partition(":")[0]).stem for remark in told} == {
        name for name, text in SITE.items() if "." in text
    }


def test_names_keep_their_commas(tmp_path: Path) -> None:
    text = "hole;depth (m);strength (kPa)\nB 1,5;3,25;1,2e1\n"
    (vane,) = read_sheets(write(tmp_path, vane=text, holes='hole,x (m)\nC1,1\nBH1,1\n"B 1,5",2\n')).vanes
    assert (vane.place.hole, vane.depth.tolist(), vane.strength.tolist()) == ("B 1,5", [3.25], [12.0])


@pytest.mark.parametrize(
    "text",
    [
        "hole;depth (m);strength (kPa)\nBH1;3.5;12\nBH1;4;13,5\n",  # a point elsewhere: which is it?
        'hole,depth (m),strength (kPa)\nBH1,3,12\nBH1,4,"13,5"\n',  # commas part the cells
        "hole\tdepth (m)\tstrength (kPa)\nBH1\t3\t12\nBH1\t4\t13,5\n",
    ],
)
def test_what_may_mean_two_things_is_refused(tmp_path: Path, text: str) -> None:
    fault = the_fault(write(tmp_path, vane=text))
    assert (fault.line, fault.message, fault.given) == (3, "this is not a number", "13,5 kPa")
    assert fault.hint == "use a decimal point and no comma"


def test_thousands_are_refused_and_mistakes_are_told_as_ever(tmp_path: Path) -> None:
    text = "hole;depth (m);strength (kPa)\nBH1;3,5;1.234,5\nBH1;4;x\nBH1;4,5;-1,5\n"
    places = [(fault.line, fault.message) for fault in refused(write(tmp_path, vane=text))]
    assert places == [
        (2, "this is not a number"),
        (3, "this is not a number"),
        (4, "the number is out of range"),
    ]
