"""AGS4 files: the form tolerated, the groups read, the mistakes named."""

import re
from pathlib import Path

import numpy as np
import pytest
from sheet_samples import kept, refused, the_fault

from probsoil.errors import SheetError
from probsoil.laboratory.ags import AgsReader, number_and_prefix
from probsoil.laboratory.collection import Collection
from probsoil.laboratory.reading import read_sheets

SPEC = "LOCA_ID,SAMP_TOP,SAMP_REF,SAMP_TYPE,SAMP_ID,SPEC_REF,SPEC_DPTH"
SPEC_UNIT = ",m,,,,,m"
KEY = "BH1,3.0,P2,P,BH1-P2,1,3.20"
GROUPS = {
    "LOCA": ("LOCA_ID,LOCA_FDEP,LOCA_NATE,LOCA_NATN", ",m,m,m", ["BH1,12.0,500,900", "C1,11,510,900"]),
    "GEOL": (
        "LOCA_ID,GEOL_TOP,GEOL_BASE,GEOL_DESC,GEOL_FORM",
        ",m,m,,",
        ["BH1,0,1.5,Crust,", "BH1,1.5,12,Grey CLAY,SOFT"],
    ),
    "SAMP": ("LOCA_ID,SAMP_TOP,SAMP_REF,SAMP_TYPE,SAMP_ID,SAMP_CLSS", ",m,,,,", ["BH1,3.00,P2,P,BH1-P2,1"]),
    "LLPL": (f"{SPEC},LLPL_PI", f"{SPEC_UNIT},", [f"{KEY},44"]),
    "CONG": (f"{SPEC},CONG_TYPE,CONG_HIGT,CONG_IVR", f"{SPEC_UNIT},,mm,", [f"{KEY},OEDOMETER,20.0,2.10"]),
    "CONS": (
        f"{SPEC},CONS_INCN,CONS_INCF,CONS_INCE,CONS_INMV,CONS_CVRT,CONS_CVLG",
        f"{SPEC_UNIT},,kPa,,m2/MN,m2/yr,m2/yr",
        [f"{KEY},1,25,2.05,0.6,7.0,", f"{KEY},2,50,1.96,1.2,1.5,1.2", f"{KEY},3,100,1.74,,,"],
    ),
    "TREG": (f"{SPEC},TREG_TYPE", f"{SPEC_UNIT},", [f"{KEY},CAUC"]),
    "TRET": (
        f"{SPEC},TRET_TESN,TRET_CONP,TRET_PWPI,TRET_STRN,TRET_DEVF,TRET_PWPF,TRET_VOLM,TRET_IVR,TRET_CVP,TRET_CRP",
        f"{SPEC_UNIT},,kPa,kPa,%,kPa,kPa,%,,kPa,kPa",
        [f"{KEY},1,25,300,2.5,28,309,2.0,2.0,40,25"],
    ),
    "TRIG": (f"{SPEC},TRIG_TYPE", f"{SPEC_UNIT},", [f"{KEY},UU"]),
    "TRIT": (
        f"{SPEC},TRIT_TESN,TRIT_STRN,TRIT_DEVF,TRIT_CU",
        f"{SPEC_UNIT},,%,kPa,kPa",
        [f"{KEY},2,8.0,20,10"],
    ),
    "ESCG": (
        f"{SPEC},ESCG_HIGT,ESCG_IVR,ESCG_DRAG,ESCG_PCP",
        f"{SPEC_UNIT},mm,,,kPa",
        [f"{KEY},20,2.0,Single drainage,61"],
    ),
    "ESCT": (
        f"{SPEC},ESCT_INCN,ESCT_INCF,ESCT_VRE,ESCT_INCV",
        f"{SPEC_UNIT},,kPa,,m2/yr",
        [f"{KEY},1,50,1.95,2", f"{KEY},2,200,1.60,1"],
    ),
    "IVAN": (
        "LOCA_ID,IVAN_DPTH,IVAN_TESN,IVAN_IVAN,IVAN_IVAR,IVAN_METH",
        ",m,,kPa,kPa,",
        ["BH1,3.0,1,12,3,Not corrected", "BH1,4.0,1,14,<2,Not corrected"],
    ),
    "SCPG": ("LOCA_ID,SCPG_TESN,SCPG_TYPE,SCPG_CAR", ",,,", ["C1,1,PC,0.75", "C1,2,PC,0.80"]),
    "SCPT": (
        "LOCA_ID,SCPG_TESN,SCPT_DPTH,SCPT_RES,SCPT_FRES,SCPT_PWP2,SCPT_QT",
        ",,m,MPa,MPa,kPa,MPa",
        ["C1,1,1.0,0.25,0.004,5,0.25", "C1,1,1.1,0.26,,9,0.26", "C1,2,2.0,0.30,,,"],
    ),
    "SCPP": ("LOCA_ID,SCPP_CSU", ",kPa", ["C1,14"]),
    "SCDG": ("LOCA_ID,SCPG_TESN,SCDG_DPTH,SCDG_CH", ",,m,m2/yr", ["C1,1,3,2.4", "C1,1,5,2.0"]),
    "MOND": ("LOCA_ID,MOND_RDNG", ",", ["SP1,2.1"]),
}


def text_of(*, without: tuple[str, ...] = (), end: str = "\r\n", **changed: tuple[str, str]) -> str:
    """Return the file; a change puts one text for another in one group."""
    parts = []
    for name, (headings, units, rows) in GROUPS.items():
        if name in without:
            continue
        lines = [("GROUP", name), ("HEADING", headings), ("UNIT", units), ("TYPE", ",".join("X" * 3))]
        lines += [("DATA", row) for row in rows]
        text = end.join(",".join(f'"{cell}"' for cell in f"{word},{rest}".split(",")) for word, rest in lines)
        if name in changed:
            old, new = changed[name]
            assert old in text, (name, old)
            text = text.replace(old, new)
        parts.append(text + end)
    return end.join(parts)


def site_file(folder: Path, **changed: tuple[str, str]) -> Path:
    path = folder / "site.ags"
    path.write_text(text_of(**changed), encoding="utf-8", newline="")
    return path


def test_every_group_fills_its_sheet(tmp_path: Path) -> None:
    site = read_sheets(site_file(tmp_path))
    oedometer, consolidation = site.oedometers
    assert oedometer.test == "BH1 3.2 m P2-1 oedometer"
    assert (oedometer.place.depth, oedometer.place.x, oedometer.place.y) == (3.2, 500.0, 900.0)
    assert (oedometer.place.stratum, oedometer.origin.row) == ("SOFT", 31)
    assert (oedometer.initial_void_ratio, oedometer.initial_height) == (2.1, 20.0)
    assert oedometer.stress.tolist() == [25.0, 50.0, 100.0]
    assert oedometer.void_ratio.tolist() == [2.05, 1.96, 1.74]
    np.testing.assert_array_equal(oedometer.reported_cv, [7.0, 1.2, np.nan])  # log-time first
    assert consolidation.test == "BH1 3.2 m P2-1 consolidation"
    assert (consolidation.reported_preconsolidation, consolidation.two_way) == (61.0, False)
    quick, slow = sorted(site.triaxials, key=lambda sheet: sheet.kind, reverse=True)
    assert (quick.test, quick.kind) == ("BH1 3.2 m P2-1 triaxial 2", "UU")
    assert quick.axial_strain.tolist() == [0.08]
    assert np.isnan([quick.axial_stress, quick.pore_pressure_change[0]]).all()
    assert (slow.kind, slow.axial_stress, slow.radial_stress) == ("CAUC", 40.0, 25.0)
    assert slow.pore_pressure_change.tolist() == [9.0]
    assert slow.initial_void_ratio == pytest.approx(2.0 - 3.0 * 0.02, abs=1e-12)  # after consolidation
    (vane,) = site.vanes
    assert (vane.corrected, vane.strength.tolist(), vane.remoulded.tolist()) == (
        False,
        [12.0, 14.0],
        [3.0, 2.0],
    )
    assert vane.plasticity_index.tolist() == [44.0, 44.0]
    first, second = site.cones
    assert (first.test, first.area_ratio, second.test, second.area_ratio) == (
        "C1 cone",
        0.75,
        "C1 cone 2",
        0.8,
    )
    assert first.cone_resistance.tolist() == [250.0, 260.0]
    np.testing.assert_array_equal(first.sleeve_friction, [4.0, np.nan])
    assert first.pore_pressure.tolist() == [5.0, 9.0]


@pytest.mark.parametrize(
    "remark",
    [
        r'IVAN_IVAR "<2" is read as 2 \(a bound, not a reading\)',
        r"row 34: CONS_INMV not used \(derived values\)",
        r"TRIT_CU not used",
        r"SCPT_QT not used",
        r"SCPP \(1 row\) not used: parameters somebody derived",
        r"SCDG \(2 rows\) not used: dissipation tests",
        r"groups not read: MOND",
    ],
)
def test_what_is_seen_and_not_used_is_told(tmp_path: Path, remark: str) -> None:
    remarks = read_sheets(site_file(tmp_path)).remarks
    assert any(re.search(remark, one) for one in remarks), remarks
    assert len(remarks) == 7


def test_order_of_groups_makes_no_difference(tmp_path: Path) -> None:
    (tmp_path / "site.ags").write_text(
        "\r\n".join(reversed(text_of().replace("\r\n\r\n", "\0").split("\0"))), encoding="utf-8", newline=""
    )
    turned = read_sheets(tmp_path / "site.ags")
    straight = read_sheets(site_file(tmp_path))
    assert {sheet.test for sheet in turned.oedometers} == {sheet.test for sheet in straight.oedometers}
    assert {sheet.kind for sheet in turned.triaxials} == {"UU", "CAUC"}
    assert [sheet.area_ratio for sheet in turned.cones] == [0.75, 0.8]


@pytest.mark.parametrize(
    "spell",
    [
        lambda text: text.replace("\r\n", "\n").encode(),
        lambda text: ("\ufeff" + text).encode(),
        lambda text: text.replace('"', "").encode(),
        lambda text: text.replace('","', '", "').encode(),
        lambda text: text.replace('"GROUP"', '"group"').replace('"DATA"', '"Data"').encode(),
        lambda text: text.replace('"3.20"', '"3.2"', 3).encode(),
        lambda text: re.sub(r'"TYPE".*\r\n', "", text).encode(),
        lambda text: (text + '"GROUP","XYZA"\r\n"HEADING","XYZA_A"\r\n"DATA","free text"\r\n').encode(),
    ],
    ids=[
        "line ends",
        "mark",
        "no quotes",
        "blanks",
        "small letters",
        "spelling",
        "no types",
        "unknown group",
    ],
)
def test_harmless_spellings_are_tolerated(tmp_path: Path, spell) -> None:  # type: ignore[no-untyped-def]
    path = tmp_path / "site.ags"
    path.write_bytes(spell(text_of()))
    site = read_sheets(path)
    assert [len(sheets) for sheets in (site.oedometers, site.triaxials, site.vanes, site.cones)] == [
        2,
        2,
        1,
        2,
    ]
    assert site.oedometers[0].void_ratio.tolist() == [2.05, 1.96, 1.74]


def test_windows_letters_and_quotes_within_cells(tmp_path: Path) -> None:
    text = text_of(GEOL=("SOFT", 'SOFT ""blå"" lera'))
    path = tmp_path / "site.ags"
    path.write_bytes(text.encode("cp1252"))
    site = read_sheets(path)
    assert site.oedometers[0].place.stratum == 'SOFT "blå" lera'
    assert any("read as Windows-1252" in remark for remark in site.remarks)


def test_units_are_those_of_the_unit_row(tmp_path: Path) -> None:
    text = text_of(CONS=('"","kPa",""', '"","MPa",""'), SCPT=('"m","MPa","MPa"', '"m","bar","MPa"'))
    for old, new in (
        ('"25","2.05"', '"0.025","2.05"'),
        ('"50","1.96"', '"0.05","1.96"'),
        ('"100","1.', '"0.1","1.'),
    ):
        text = text.replace(old, new)
    for old in ("0.25", "0.26", "0.30"):
        text = text.replace(f'.0","{old}"', f'.0","{10 * float(old):g}"').replace(
            f'1.1","{old}"', f'1.1","{10 * float(old):g}"'
        )
    path = tmp_path / "site.ags"
    path.write_text(text, encoding="utf-8", newline="")
    site = read_sheets(path)
    np.testing.assert_allclose(site.oedometers[0].stress, [25.0, 50.0, 100.0], rtol=1e-12)
    np.testing.assert_allclose(site.cones[0].cone_resistance, [250.0, 260.0], rtol=1e-12)


def test_cone_groups_of_4_2_are_read_too(tmp_path: Path) -> None:
    text = text_of(without=("SCPG", "SCPT", "SCPP", "SCDG"))
    text += (
        '\r\n"GROUP","CPTG"\r\n"HEADING","LOCA_ID","CPTG_TESN","CPTG_TYPE","CPTG_CAR"\r\n"UNIT","","","",""\r\n'
        '"DATA","C1","1","CPTU","0.8"\r\n"DATA","C1","2","T-BAR",""\r\n'
        '\r\n"GROUP","CPTT"\r\n"HEADING","LOCA_ID","CPTG_TESN","CPTT_REDN","CPTT_DPTH","CPTT_QC","CPTT_U2"\r\n'
        '"UNIT","","","","m","MPa","MPa"\r\n"DATA","C1","1","1","1.0","0.25","0.02"\r\n'
        '"DATA","C1","2","1","1.0","0.11",""\r\n'
        '\r\n"GROUP","CPTP"\r\n"HEADING","LOCA_ID","CPTP_SU1"\r\n"UNIT","","kPa"\r\n"DATA","C1","12"\r\n'
    )
    (tmp_path / "site.ags").write_text(text, encoding="utf-8", newline="")
    site = read_sheets(tmp_path / "site.ags")
    (cone,) = site.cones
    assert (cone.area_ratio, cone.cone_resistance.tolist(), cone.pore_pressure.tolist()) == (
        0.8,
        [250.0],
        [20.0],
    )
    assert any("CPTG_TYPE T-BAR is no test that is used; left out" in remark for remark in site.remarks)
    assert any("CPTP (1 row) not used" in remark for remark in site.remarks)


def test_sounding_in_both_cone_groups_is_read_once(tmp_path: Path) -> None:
    text = text_of() + (
        '\r\n"GROUP","CPTG"\r\n"HEADING","LOCA_ID","CPTG_TESN"\r\n"UNIT","",""\r\n"DATA","C1","1"\r\n'
        '\r\n"GROUP","CPTT"\r\n"HEADING","LOCA_ID","CPTG_TESN","CPTT_DPTH","CPTT_QC"\r\n'
        '"UNIT","","","m","MPa"\r\n"DATA","C1","1","1.0","0.25"\r\n'
    )
    (tmp_path / "site.ags").write_text(text, encoding="utf-8", newline="")
    site = read_sheets(tmp_path / "site.ags")
    assert len(site.cones) == 2
    assert any("CPTT of C1/1 is not read, SCPT has it too" in remark for remark in site.remarks)


@pytest.mark.parametrize(
    ("kind", "stresses", "read"),
    [
        ("CU", ("40", "25"), "CAUC"),
        ("CU", ("40", "40"), "CIUC"),
        ("CU", ("", ""), "CIUC"),
        ("CD", ("", ""), "CIDC"),
        ("cadc", ("40", "25"), "CADC"),
        ("UUP", ("", ""), "UU"),
    ],
)
def test_kind_of_triaxial_test(tmp_path: Path, kind: str, stresses: tuple[str, str], read: str) -> None:
    path = site_file(tmp_path, TREG=("CAUC", kind), TRET=('"40","25"', f'"{stresses[0]}","{stresses[1]}"'))
    sheet = next(sheet for sheet in read_sheets(path).triaxials if sheet.test.endswith("triaxial"))
    assert sheet.kind == read


@pytest.mark.parametrize("kind", ["CIUCM", "CUM", "CADE", ""])
def test_kind_that_is_not_used_is_told(tmp_path: Path, kind: str) -> None:
    site = read_sheets(site_file(tmp_path, TREG=("CAUC", kind)))
    assert [sheet.kind for sheet in site.triaxials] == ["UU"]
    assert any(f"TREG_TYPE {kind} is no kind that is used; left out" in remark for remark in site.remarks)


def test_swelling_test_is_no_oedometer(tmp_path: Path) -> None:
    site = read_sheets(site_file(tmp_path, CONG=("OEDOMETER", "SWELL")))
    assert [sheet.test for sheet in site.oedometers] == ["BH1 3.2 m P2-1 consolidation"]
    assert any("CONG_TYPE SWELL is no test that is used" in remark for remark in site.remarks)


def test_disturbed_sample_is_told(tmp_path: Path) -> None:
    site = read_sheets(site_file(tmp_path, SAMP=('"BH1-P2","1"', '"BH1-P2","3"')))
    told = [remark for remark in site.remarks if "disturbed sample (type P, class 3)" in remark]
    assert len(told) == 4  # each test of it


@pytest.mark.parametrize(
    ("prefixed", "number", "prefix"),
    [("<5", "5", "<"), (">= 12", "12", ">="), ("#2.70", "2.70", "#"), ("7", "7", ""), ("x<5", "x<5", "")],
)
def test_prefix_is_kept_beside_the_number(prefixed: str, number: str, prefix: str) -> None:
    assert number_and_prefix(prefixed) == (number, prefix)


MISTAKES = [
    ("CONS", ('"CONS_INCF"', '"CONS_INCX"'), r":34: CONS_INCF: the heading is missing in the group CONS"),
    ("CONS", ('"","kPa",""', '"","",""'), r":35:10: CONS_INCF: the heading has no unit"),
    ("CONS", ('"","kPa",""', '"","m",""'), r':35:10: CONS_INCF: unit "m" is a unit of length, not of'),
    ("CONS", ('"50"', '"5O"'), r":38:10: CONS_INCF: this is not a number\n *given: +5O kPa"),
    ("CONS", ('"1.96"', '"-1.96"'), r":38:11: CONS_INCE: the number is out of range"),
    (
        "CONS",
        ('"1.96"', '"2.16"'),
        r":38:11: CONS_INCE: the void ratio rises under load: 2.05 at .* \(row 37\)",
    ),
    ("CONS", ('"2","50"', '"4","50"'), r":39:9: CONS_INCN: increment is out of order"),
    ("CONS", ('"2","50"', '"1","50"'), r":38:9: CONS_INCN: the row repeats row 37"),
    ("CONS", (',"1.5","1.2"', ',"1.5"'), r":38: the row has 12 cells and the group CONS 13 headings"),
    ("CONS", ('"2","50"', '"2","50'), r":38: the line cannot be parted into cells"),
    ("CONS", ('"UNIT"', '"UNITS"'), r'the line begins with "UNITS"'),
    (
        "CONS",
        ('"HEADING","LOCA_ID"', '"TYPE","LOCA_ID"'),
        r":37: the group CONS has no HEADING row; its rows",
    ),
    ("CONS", ('"CONS_CVRT"', '"CONS_INCN"'), r":34: the heading CONS_INCN is there twice"),
    (
        "CONG",
        ('"1","3.20"', '"2","3.20"'),
        r':37:2: LOCA_ID: no row of the .* specimens has .* "BH1 3.2 m P2-1 oedometer" \(3 rows of it\)',
    ),
    ("TRET", ('"3.20"', '"3.30"'), r"no row of TREG goes with this row of TRET: BH1 3 P2 P BH1-P2 1 3.3"),
    ("SCPT", ('"C1","2"', '"C1","3"'), r"no row of SCPG goes with this row of SCPT: C1 3"),
    ("SAMP", ('"BH1-P2"', '"BH1-P3"'), r"no row of SAMP goes with this row of CONG: BH1 3 P2 P BH1-P2"),
    ("TRET", ('"40","25"', '"",""'), r"TRET_CVP: axial stress is missing"),
    (
        "SCPT",
        ('"m","MPa","MPa"', '"m","kPa","MPa"'),
        r'SCPT_RES: the greatest .* of "C1 cone" is 0.26 kPa: is the unit right\?',
    ),
    ("IVAN", ('"BH1","4.0"', '"BH1","14.0"'), r"IVAN_DPTH: the depth is below the hole, which ends at 12 m"),
    ("GEOL", ('"1.5","12"', '"1.2","12"'), r"GEOL_TOP: the stratum overlaps the one that ends at 1.5 m"),
    ("LOCA", ('"C1"', '"C2"'), r'LOCA_ID: no row of the table holes has the hole "C1"'),
]


@pytest.mark.parametrize(("group", "change", "match"), MISTAKES, ids=lambda _: "")
def test_mistake_is_named_with_line_and_heading(
    tmp_path: Path, group: str, change: tuple[str, str], match: str
) -> None:
    path = site_file(tmp_path, **{group: change})
    told = "\n".join(str(fault) for fault in refused(path))
    assert re.search(r"site\.ags" + match if match.startswith(":") else match, told), told
    assert kept(path).remarks


def test_group_without_units_is_told_once(tmp_path: Path) -> None:
    path = tmp_path / "site.ags"
    path.write_text(
        re.sub(r'("GROUP","CONG"\r\n.*\r\n)"UNIT".*\r\n', r"\1", text_of()), encoding="utf-8", newline=""
    )
    assert the_fault(path).message == "the group CONG has no UNIT row; its rows are not read"


def test_missing_heading_is_told_without_orphans(tmp_path: Path) -> None:
    assert the_fault(site_file(tmp_path, CONG=('"CONG_IVR"', '"CONG_SATR"'))).key == "CONG_IVR"


def test_file_that_begins_with_something_else(tmp_path: Path) -> None:
    path = tmp_path / "site.ags"
    path.write_text("Dear all,\nhere is the file\n" + text_of(), encoding="utf-8", newline="")
    fault = the_fault(path)
    assert (fault.line, fault.message) == (1, "the line belongs to no group")
    path.write_text("", encoding="utf-8")
    with pytest.raises(SheetError, match="no test is left to be read"):
        read_sheets(path)


def test_rows_are_given_with_group_and_line() -> None:
    lines = enumerate(['"GROUP","ABCD"', '"HEADING","A","B"', '"UNIT","m"', '"DATA","1","x ""y"""'], 1)
    (row,) = AgsReader(Collection(), "f").rows(lines)
    assert (row.line, row.cells) == (4, {"A": "1", "B": 'x "y"'})
    assert (row.group.name, row.group.line, row.group.units, row.group.types) == (
        "ABCD",
        2,
        ("m", ""),
        ("", ""),
    )
