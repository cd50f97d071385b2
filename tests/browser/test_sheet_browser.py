"""The calculation sheet in a real browser: no requests, nothing beyond the edge, on paper too."""

import json

import pytest

from probsoil.assessment import sheet
from probsoil.report.sheet_page import write_sheet
from probsoil.scenario import parse_scenario, starter_text

pytestmark = pytest.mark.browser


@pytest.fixture(scope="module")
def place(tmp_path_factory):
    path = tmp_path_factory.mktemp("sheet") / "sheet.html"
    write_sheet(path, sheet(parse_scenario(starter_text("embankment"))).to_dict())
    return path.as_uri()


@pytest.mark.parametrize(("width", "media"), [(1100, ""), (390, ""), (680, "print")])
def test_page_fits_and_asks_for_nothing(browser, place, width, media):
    size = {"width": width, "height": 900, "deviceScaleFactor": 1, "mobile": False}
    browser.execute_cdp_cmd("Emulation.setDeviceMetricsOverride", size)
    browser.execute_cdp_cmd("Emulation.setEmulatedMedia", {"media": media, "features": []})
    browser.get_log("browser")
    browser.get_log("performance")
    browser.get(place)
    assert browser.get_log("browser") == []
    asked = [json.loads(entry["message"])["message"] for entry in browser.get_log("performance")]
    wanted = {
        one["params"]["request"]["url"] for one in asked if one["method"] == "Network.requestWillBeSent"
    }
    assert wanted == {place}
    assert browser.execute_script("return document.documentElement.scrollWidth") <= width
    assert browser.find_elements("css selector", ".line .math")
    browser.execute_cdp_cmd("Emulation.setEmulatedMedia", {"media": "", "features": []})
