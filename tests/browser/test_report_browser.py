"""The page in a real browser: moving threshold, no scripts, small screens, paper, no network."""

import base64
import json
import re

import pytest

from probsoil.report.curve import curve_steps

pytestmark = pytest.mark.browser

READ = """
const box = document.querySelector(`[data-curve="${arguments[0]}"]`);
return [...box.querySelectorAll("[data-read]")].map((node) => node.textContent);
"""


@pytest.fixture
def page(browser, address):
    browser.execute_cdp_cmd("Emulation.setScriptExecutionDisabled", {"value": False})
    browser.execute_cdp_cmd("Emulation.setEmulatedMedia", {"media": "", "features": []})
    resize(browser, 1100)
    browser.get_log("browser")
    browser.get(address)
    yield browser
    assert [entry for entry in browser.get_log("browser") if entry["level"] in {"SEVERE", "WARNING"}] == []


def resize(browser, width, height=900):
    sizes = {"width": width, "height": height, "deviceScaleFactor": 1, "mobile": False}
    browser.execute_cdp_cmd("Emulation.setDeviceMetricsOverride", sizes)


def expected(step):
    return [step.text, step.chance, step.margin, step.count]


def part(browser, number, selector):
    return browser.find_element("css selector", f'[data-curve="{number}"] {selector}')


@pytest.mark.parametrize("number", [1, 2, 3, 4])
def test_starts_at_the_limit(page, results, number):
    limit = results["limits"][number - 1]
    steps = curve_steps(limit, results)
    own = next(step for step in steps if step.threshold == limit["threshold"])
    assert page.execute_script(READ, number) == expected(own)
    assert float(part(page, number, ".typed").get_attribute("value")) == limit["threshold"]
    assert part(page, number, "output").is_displayed()


@pytest.mark.parametrize("number", [1, 3])
def test_arrow_keys_reach_every_step(page, results, number):
    from selenium.webdriver.common.keys import Keys

    steps = curve_steps(results["limits"][number - 1], results)
    slider = part(page, number, "input[type=range]")
    slider.send_keys(Keys.HOME)
    for place, step in enumerate(steps):
        assert page.execute_script(READ, number) == expected(step)
        assert slider.get_attribute("value") == str(place)
        assert slider.get_attribute("aria-valuetext") == step.text
        slider.send_keys(Keys.ARROW_RIGHT)
    assert page.execute_script(READ, number) == expected(steps[-1])


@pytest.mark.parametrize("number", [1, 2, 3, 4])
def test_number_box_reads_every_step(page, results, number):
    steps = curve_steps(results["limits"][number - 1], results)
    readings = page.execute_script(
        """
        const box = document.querySelector(`[data-curve="${arguments[0]}"]`);
        const typed = box.querySelector(".typed");
        return arguments[1].map((value) => {
          typed.value = value;
          typed.dispatchEvent(new Event("input"));
          return [[...box.querySelectorAll("[data-read]")].map((node) => node.textContent),
            box.querySelector(".said").textContent];
        });
        """,
        number,
        [repr(step.threshold) for step in steps],
    )
    assert readings == [[expected(step), ""] for step in steps]


def test_typing_by_keyboard(page, results):
    from selenium.webdriver.common.keys import Keys

    steps = curve_steps(results["limits"][0], results)
    by_text = {step.text: step for step in steps}
    typed = part(page, 1, ".typed")
    typed.send_keys(Keys.CONTROL, "a")
    typed.send_keys("0.0504")
    assert page.execute_script(READ, 1) == expected(by_text["0.050 m"])
    assert part(page, 1, ".said").text == "Shown at the nearest threshold computed, 0.050 m."
    typed.send_keys(Keys.CONTROL, "a")
    typed.send_keys("77")
    assert page.execute_script(READ, 1) == expected(steps[-1])
    assert part(page, 1, ".said").text.startswith("Outside the thresholds computed; shown at ")
    typed.send_keys(Keys.CONTROL, "a")
    typed.send_keys("0.120", Keys.ARROW_UP)
    assert page.execute_script(READ, 1) == expected(by_text["0.121 m"])
    typed.send_keys(Keys.ARROW_DOWN, Keys.ARROW_DOWN)
    assert page.execute_script(READ, 1) == expected(by_text["0.119 m"])
    part(page, 1, "button").click()
    assert page.execute_script(READ, 1)[0] == "0.100 m"


def test_the_marker_follows_the_curve(page):
    slider = part(page, 1, "input[type=range]")
    for place in (0, 60, 200):
        page.execute_script(
            "arguments[0].value = arguments[1]; arguments[0].dispatchEvent(new Event('input'))", slider, place
        )
        gap = page.execute_script(
            """
            const box = document.querySelector('[data-curve="1"]');
            const dot = box.querySelector(".dot.even").getBoundingClientRect();
            const path = box.querySelector(".even .trace");
            const frame = path.ownerSVGElement.getBoundingClientRect();
            const x = (dot.x + dot.width / 2 - frame.x) / frame.width * 1000;
            const total = path.getTotalLength();
            let best = 1e9;
            for (let at = 0; at <= total; at += 1) {
              const point = path.getPointAtLength(at);
              const down = point.y / 1000 * frame.height + frame.y;
              if (Math.abs(point.x - x) < 1) best = Math.min(best, Math.abs(down - dot.y - dot.height / 2));
            }
            return best;
            """
        )
        assert gap < 1.5  # pixels; the drawing is rounded to a thousandth of its 240 pixels and sampled by 1


def test_scale_choice_swaps_the_axis(page):
    log, even = part(page, 1, ".plot g.log"), part(page, 1, ".plot g.even")
    assert (log.is_displayed(), even.is_displayed()) == (False, True)
    part(page, 1, ".pick-log").click()
    assert (log.is_displayed(), even.is_displayed()) == (True, False)
    assert part(page, 3, ".plot g.log").is_displayed()


def test_works_without_scripts(page, address):
    page.execute_cdp_cmd("Emulation.setScriptExecutionDisabled", {"value": True})
    page.get(address)
    assert not part(page, 1, ".controls").is_displayed()
    assert not page.find_element("css selector", "#curves span.scripted").is_displayed()
    assert part(page, 1, ".plot").is_displayed()
    assert part(page, 1, "output b.big").text == "10.8 %"
    part(page, 1, "summary").click()
    rows = page.find_elements("css selector", '[data-curve="1"] tbody tr')
    cells = [
        [cell.text for cell in row.find_elements("css selector", "th, td")]
        for row in rows
        if row.is_displayed()
    ]
    assert ["0.100 m (the limit)", "10.8 %", "10.4 to 11.3 %", "2,168"] in [
        [cell.replace("\u00a0", " ") for cell in row] for row in cells
    ]
    assert len(cells) >= 11
    page.execute_cdp_cmd("Emulation.setScriptExecutionDisabled", {"value": False})


@pytest.mark.parametrize("width", [320, 375, 768, 1400])
def test_no_sideways_scroll(page, width):
    resize(page, width)
    page.execute_script("for (const node of document.querySelectorAll('details')) node.open = true")
    wide, room = page.execute_script(
        "const root = document.documentElement; return [root.scrollWidth, root.clientWidth]"
    )
    assert wide <= room
    assert page.execute_script(
        "const inside = (node) => node.getBoundingClientRect().right <= innerWidth;"
        "return [...document.querySelectorAll('.plot')].every(inside)"
    )


def test_wide_tables_scroll_in_their_own_box(page):
    resize(page, 320)
    box = page.find_element("css selector", "#limits .scroll")
    wide, room = page.execute_script("return [arguments[0].scrollWidth, arguments[0].clientWidth]", box)
    assert wide > room
    assert box.get_attribute("tabindex") == "0"


def test_dark_setting_recolours_page_and_figures(page):
    def colours():
        return page.execute_script(
            """
            const of = (selector, prop) => getComputedStyle(document.querySelector(selector))[prop];
            return [of("body", "backgroundColor"), of("#settlement text", "fill"), of(".trace", "stroke")];
            """
        )

    def setting(value):
        page.execute_cdp_cmd(
            "Emulation.setEmulatedMedia", {"features": [{"name": "prefers-color-scheme", "value": value}]}
        )

    setting("light")
    light = colours()
    setting("dark")
    assert all(a != b for a, b in zip(light, colours(), strict=True))


def test_all_controls_take_the_keyboard(page):
    from selenium.webdriver.common.keys import Keys

    body = page.find_element("css selector", "body")
    body.click()
    page.execute_script("document.activeElement.blur(); window.scrollTo(0, 0)")
    seen = set()
    for _ in range(140):
        page.switch_to.active_element.send_keys(Keys.TAB)
        seen.add(
            page.execute_script("const n = document.activeElement; return n.type || n.className || n.tagName")
        )
    assert {"range", "number", "button", "radio", "scroll", "SUMMARY", "PRE", "skip"} <= seen


def test_prints_with_all_numbers_and_no_controls(page):
    page.execute_cdp_cmd("Emulation.setEmulatedMedia", {"media": "print"})
    assert not part(page, 1, ".controls").is_displayed()
    assert not page.find_element("css selector", "nav").is_displayed()
    page.execute_script("window.dispatchEvent(new Event('beforeprint'))")
    assert all(node.is_displayed() for node in page.find_elements("css selector", "table"))
    page.execute_cdp_cmd("Emulation.setEmulatedMedia", {"media": ""})
    paper = base64.b64decode(page.execute_cdp_cmd("Page.printToPDF", {"preferCSSPageSize": True})["data"])
    assert 4 <= len(re.findall(rb"/Type\s*/Page\b", paper)) <= 30


def test_no_request_but_the_page_itself(page, address):
    page.get_log("performance")
    page.get(address)
    events = [json.loads(entry["message"])["message"] for entry in page.get_log("performance")]
    sent = [e["params"]["request"]["url"] for e in events if e["method"] == "Network.requestWillBeSent"]
    assert sent == [address]
