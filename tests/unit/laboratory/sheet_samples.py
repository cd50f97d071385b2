"""A small site in CSV, and how to spoil it."""

from pathlib import Path

import pytest

from probsoil.errors import Fault, SheetError
from probsoil.laboratory.reading import read_sheets
from probsoil.laboratory.sheets import SiteSheets

SITE = {
    "holes": "hole,x (m),y (m),final depth (m)\nBH1,10,20,12\nC1,30,20,9\n",
    "strata": "hole,top (m),base (m),stratum\nBH1,0,1.5,crust\nBH1,1.5,12,soft clay\n",
    "plasticity": "hole,depth (m),plasticity index (%)\nBH1,3.2,45\nBH1,7,38\n",
    "oedometer_specimens": "test,hole,depth (m),initial void ratio,initial height (mm)\nO1,BH1,3.4,2.1,20\n",
    "oedometer_increments": (
        "test,increment,stress (kPa),void ratio,cv (m2/year)\n"
        "O1,1,12.5,2.080,\nO1,2,25,2.050,6\nO1,3,50,1.960,1.2\nO1,4,100,1.740,1.0\nO1,5,25,1.790,\n"
    ),
    "oedometer_readings": (
        "test,increment,time (min),compression (mm)\nO1,3,0.25,0.1\nO1,3,15,0.3\nO1,3,1440,0.58\n"
    ),
    "triaxial_specimens": (
        "test,hole,depth (m),kind,axial stress (kPa),radial stress (kPa),void ratio\n"
        "T1,BH1,4.1,CAUC,40,25,1.9\n"
    ),
    "triaxial_readings": (
        "test,axial strain (%),deviator stress (kPa),pore pressure change (kPa)\n"
        "T1,0,15,0\nT1,0.5,24,4\nT1,4,28,9\n"
    ),
    "vane": "hole,depth (m),strength (kPa),corrected\nBH1,3,12,no\nBH1,4,13.5,no\n",
    "cone": "hole,depth (m),cone resistance (MPa),pore pressure (kPa)\nC1,1.0,0.25,5\nC1,1.1,0.26,9\n",
}


def write(folder: Path, **changed: str | tuple[str, str]) -> Path:
    """Write the site with other texts, or with one piece of a text put for another."""
    folder.mkdir(exist_ok=True)
    for name, text in SITE.items():
        change = changed.get(name, text)
        if isinstance(change, tuple):
            old, new = change
            assert text.count(old) == 1, (name, old)
            change = text.replace(old, new)
        (folder / f"{name}.csv").write_text(change, encoding="utf-8")
    return folder


def refused(folder: Path) -> tuple[Fault, ...]:
    """Return the mistakes of a folder."""
    with pytest.raises(SheetError) as caught:
        read_sheets(folder)
    return caught.value.faults


def the_fault(folder: Path) -> Fault:
    """Return the only mistake of a folder."""
    faults = refused(folder)
    assert len(faults) == 1, [str(fault) for fault in faults]
    return faults[0]


def kept(folder: Path) -> SiteSheets:
    """Return what is left of a folder with mistakes."""
    return read_sheets(folder, keep_good_rows=True)
