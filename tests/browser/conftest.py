"""A local headless browser, and the report of synthetic results in it."""

import json
import sys
from pathlib import Path

import pytest

sys.path.insert(0, str(Path(__file__).parents[1] / "unit" / "report"))

CHROMIUM, DRIVER = Path("/usr/bin/chromium"), Path("/usr/bin/chromedriver")
FLAGS = (
    *("--headless", "--no-sandbox", "--disable-gpu", "--disable-quic", "--no-first-run"),
    *("--disable-background-networking", "--disable-component-update", "--disable-sync"),
)


@pytest.fixture(scope="session")
def results():
    from sample_results import sample

    return sample()


@pytest.fixture(scope="session")
def address(results, tmp_path_factory):
    from probsoil.report import write_report

    folder = tmp_path_factory.mktemp("report")
    (folder / "results.json").write_text(json.dumps(results), encoding="utf-8")
    return write_report(folder).as_uri()


@pytest.fixture(scope="session")
def browser(tmp_path_factory):
    webdriver = pytest.importorskip("selenium.webdriver")
    if not (CHROMIUM.exists() and DRIVER.exists()):
        pytest.skip("needs chromium and chromium-driver")
    from selenium.webdriver.chrome.service import Service

    options = webdriver.ChromeOptions()
    options.binary_location = str(CHROMIUM)
    for flag in (*FLAGS, f"--user-data-dir={tmp_path_factory.mktemp('profile')}"):
        options.add_argument(flag)
    options.set_capability("goog:loggingPrefs", {"browser": "ALL", "performance": "ALL"})
    driver = webdriver.Chrome(options=options, service=Service(str(DRIVER)))
    yield driver
    driver.quit()
