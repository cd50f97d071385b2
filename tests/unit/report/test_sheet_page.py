"""The sheet as a page and as CSV: complete, self-contained, and the same numbers everywhere."""

import csv
import io
import re
from html.parser import HTMLParser

import pytest

from probsoil.assessment import sheet
from probsoil.report.sheet_columns import sheet_tables
from probsoil.report.sheet_page import render_sheet
from probsoil.report.sheet_tables import tables_csv
from probsoil.scenario import parse_scenario, starter_text

HOSTILE = '<script>alert("1")</script> & Söhne'


@pytest.fixture(scope="module", params=["embankment", "tank"])
def content(request: pytest.FixtureRequest) -> dict:
    return sheet(parse_scenario(starter_text(request.param))).to_dict()


class Reader(HTMLParser):
    """Collects tables, tags and text."""

    def __init__(self) -> None:
        super().__init__()
        self.tags: list[str] = []
        self.links: list[str] = []
        self.tables: list[list[list[str]]] = []
        self.ids: list[str] = []
        self.text = ""
        self.cell = False

    def handle_starttag(self, tag, attrs) -> None:
        self.tags.append(tag)
        given = dict(attrs)
        self.links += [given[key] for key in ("href", "src") if key in given]
        self.ids += [given["id"]] if "id" in given else []
        if tag == "table":
            self.tables.append([])
        if tag == "tr":
            self.tables[-1].append([])
        if tag in ("td", "th"):
            self.tables[-1][-1].append("")
            self.cell = True

    def handle_endtag(self, tag) -> None:
        self.cell = self.cell and tag not in ("td", "th")

    def handle_data(self, data) -> None:
        self.text += data
        if self.cell:
            self.tables[-1][-1][-1] += data


def read(page: str) -> Reader:
    reader = Reader()
    reader.feed(page)
    return reader


def test_page_is_one_file_without_scripts_or_requests(content: dict) -> None:
    page = render_sheet(content)
    reader = read(page)
    assert "script" not in reader.tags
    assert all(link.startswith("#") for link in reader.links)
    assert {link[1:] for link in reader.links} <= set(reader.ids)
    assert "url(" not in page
    assert "://" not in page
    assert "default-src 'none'" in page
    assert render_sheet(content) == page


def test_names_of_the_user_are_only_text(content: dict) -> None:
    page = render_sheet({**content, "title": HOSTILE})
    assert "<script" not in page
    assert HOSTILE in read(page).text


def test_page_shows_every_table_and_every_formula(content: dict) -> None:
    reader = read(render_sheet(content).replace("\u00a0", " "))
    shown = [[row for row in table if row] for table in reader.tables]
    for table in sheet_tables(content):
        if table.name == "formulas":
            continue
        wanted = [[text.strip() for text in row] for row in [list(table.headings), *table.texts()]]
        found = [[[text.strip() for text in row] for row in one] for one in shown]
        assert wanted in found, table.name
    for line in content["formulas"]:
        assert line["formula"] in reader.text
        assert f"= {line['numbers']} = {line['written']}" in reader.text


def test_every_number_of_a_table_has_a_unit(content: dict) -> None:
    for table in sheet_tables(content):
        for column in table.columns:
            counted = column.form in ("", "d")
            assert counted or re.search(r"\[[^\]]+\]$", column.heading), f"{table.name}: {column.heading}"


def test_csv_holds_the_unrounded_numbers_section_by_section(content: dict) -> None:
    sections = [part.splitlines() for part in tables_csv(sheet_tables(content)).strip().split("\n\n")]
    names = [next(csv.reader(section[:1]))[0] for section in sections]
    assert names == [table.name for table in sheet_tables(content)]
    assert names[:2] == ["layers", "stress in situ"]
    rows = list(csv.DictReader(io.StringIO("\n".join(sections[1][1:]))))
    assert [float(row["effective σ'0 [kPa]"]) for row in rows] == [
        row["initial_stress"] for row in content["sublayers"]
    ]
    assert [int(row["no."]) for row in rows] == list(range(1, len(rows) + 1))


def test_cautions_and_assumptions_are_told(content: dict) -> None:
    text = read(render_sheet(content)).text.replace("\u00a0", " ")
    for sentence in (*content["assumptions"], *content["cautions"]):
        assert sentence in text
