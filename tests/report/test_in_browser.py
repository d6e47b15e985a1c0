"""The report in a browser, as a person uses it: with mouse and keyboard, on a desk and on a hand-held screen."""

from __future__ import annotations

import json
import os
import shutil
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest

selenium = pytest.importorskip("selenium", reason="selenium is not installed")

from selenium import webdriver  # noqa: E402
from selenium.webdriver.chrome.service import Service  # noqa: E402
from selenium.webdriver.common.action_chains import ActionChains  # noqa: E402
from selenium.webdriver.common.keys import Keys  # noqa: E402

_BROWSER = next(
    (found for name in ("chromium", "chromium-browser", "google-chrome") if (found := shutil.which(name))), ""
)
_DRIVER = shutil.which("chromedriver") or ""

pytestmark = pytest.mark.skipif(not (_BROWSER and _DRIVER), reason="there is no browser (chromium and chromedriver)")


@pytest.fixture(scope="module")
def browser(tmp_path_factory: pytest.TempPathFactory) -> Iterator[webdriver.Chrome]:
    options = webdriver.ChromeOptions()
    options.binary_location = _BROWSER
    for argument in (
        "--headless",
        "--no-sandbox",
        "--disable-gpu",
        "--disable-quic",
        "--no-first-run",
        "--disable-background-networking",
        "--disable-component-update",
        "--disable-sync",
        "--window-size=1280,900",
        f"--user-data-dir={tmp_path_factory.mktemp('browser')}",
    ):
        options.add_argument(argument)
    options.set_capability("goog:loggingPrefs", {"browser": "ALL", "performance": "ALL"})
    driver = webdriver.Chrome(options=options, service=Service(_DRIVER))
    yield driver
    driver.quit()


@pytest.fixture
def page(browser: webdriver.Chrome, report: Path) -> webdriver.Chrome:
    """The report, freshly opened at 1280 px."""
    browser.execute_cdp_cmd(
        "Emulation.setDeviceMetricsOverride", {"width": 1280, "height": 900, "deviceScaleFactor": 1, "mobile": False}
    )
    browser.get((report / "report.html").as_uri())
    return browser


def _strip(page: webdriver.Chrome, index: int = 0) -> Any:
    """The drawn strip of that number among those that are shown."""
    strips = [strip for strip in page.find_elements("css selector", "svg.strip") if strip.is_displayed()]
    return strips[index]


def _move_to(page: webdriver.Chrome, strip: Any, share: float) -> None:
    """Put the pointer on a strip, at a share of the way from its left edge to its right edge."""
    page.execute_script("arguments[0].scrollIntoView({block: 'center'})", strip)
    size = strip.size
    ActionChains(page, duration=0).move_to_element_with_offset(strip, round((share - 0.5) * size["width"]), 0).perform()


def _read_out(page: webdriver.Chrome) -> dict[str, str]:
    names = [element.text for element in page.find_elements("css selector", "#read-out dt")]
    values = [element.text for element in page.find_elements("css selector", "#read-out dd:not(.long)")]
    return dict(zip(names, values, strict=True))


def _length(page: webdriver.Chrome) -> float:
    """Length of the path [mm]."""
    return float(page.execute_script("return JSON.parse(document.querySelector('svg.strip').dataset.span)"))


def _place(page: webdriver.Chrome) -> float:
    return float(_read_out(page)["length s"].split()[0])


def _shares(page: webdriver.Chrome) -> set[float]:
    """Where the cursor stands on each drawn strip, as a share of the strip's axes."""
    return set(
        page.execute_script(
            """return [...document.querySelectorAll("svg.strip")].flatMap((svg) => {
                 const boxes = JSON.parse(svg.dataset.boxes);
                 return [...svg.querySelectorAll(".cursor")].map((line, k) =>
                   Number(((line.getAttribute("x1") - boxes[k][0]) / (boxes[k][2] - boxes[k][0])).toFixed(3)));
               })"""
        )
    )


def test_nothing_is_complained_of_and_nothing_is_asked_from_anywhere(page: webdriver.Chrome) -> None:
    _move_to(page, _strip(page), 0.5)
    assert [entry for entry in page.get_log("browser") if entry["level"] in ("SEVERE", "WARNING")] == []
    events = [json.loads(entry["message"])["message"] for entry in page.get_log("performance")]
    asked = {
        event["params"]["request"]["url"]
        for event in events
        if event["method"] == "Network.requestWillBeSent" and event["params"]["documentURL"].startswith("file:")
    }  # the browser's own start page is not ours
    assert asked
    assert all(url.startswith(("file:", "data:")) for url in asked)


def test_a_run_named_script_is_shown_as_text(page: webdriver.Chrome) -> None:
    assert "<script>bare</script>" in page.find_element("css selector", ".verdict").text
    assert len(page.find_elements("css selector", "body script")) == 2


def test_the_mark_follows_the_pointer_on_all_strips(page: webdriver.Chrome) -> None:
    strip = _strip(page, 0)
    _move_to(page, strip, 0.4)
    first, shares = _place(page), _shares(page)
    assert len(shares) == 1
    _move_to(page, strip, 0.8)
    second = _place(page)
    assert second - first == pytest.approx(0.4 * _length(page), rel=0.25)
    (share,) = _shares(page)
    assert share == pytest.approx(second / _length(page), abs=2e-3)


def test_the_mark_on_the_path_and_the_tip_of_the_arm_stand_where_the_target_is(page: webdriver.Chrome) -> None:
    _move_to(page, _strip(page, 1), 0.65)
    found = page.execute_script(
        """const data = JSON.parse(document.getElementById("linked").textContent);
           const s = parseFloat(document.querySelector("#read-out dd").textContent);
           const k = data.s.findIndex((each) => Math.abs(each - s) < 0.051);
           const tip = data.arm[k].slice(-3);
           const svg = document.querySelector("svg.map"), map = JSON.parse(svg.dataset.map);
           const view = JSON.parse(svg.dataset.view), aim = svg.querySelector(".aim");
           const pose = document.querySelector("svg.pose"), own = JSON.parse(pose.dataset.views)[0];
           const drawn = pose.querySelector('[id$="-arm-0"] path').getAttribute("d");
           const end = drawn.split("L").pop().split(" ").map(Number);
           const at = (m, v) => [m[0] + m[1] * tip[v.across], m[2] + m[3] * tip[v.up]];
           return [at(map, view), [aim.cx.baseVal.value, aim.cy.baseVal.value], at(own.map, own), end];"""
    )
    assert found[1] == pytest.approx(found[0], abs=0.01)
    assert found[3] == pytest.approx(found[2], abs=0.01)


def test_choosing_a_region_zooms_every_strip_and_escape_shows_the_whole_path_again(page: webdriver.Chrome) -> None:
    chip = page.find_element("css selector", '.chip[data-region="0"]')
    page.execute_script("arguments[0].scrollIntoView({block: 'center'})", chip)
    chip.click()
    stretched = """return [...document.querySelectorAll("svg.strip")].map((svg) =>
        svg.querySelectorAll('[transform*="scale("]').length)"""
    assert all(page.execute_script(stretched))
    assert chip.get_attribute("aria-pressed") == "true"
    ticks = [
        float(tick.text)
        for tick in page.find_elements("css selector", "svg.strip .zoom-tick")
        if tick.text[:1].isdigit()
    ]
    region = page.execute_script("return JSON.parse(document.getElementById('linked').textContent).regions[0]")
    assert min(ticks) <= region["end"]
    assert max(ticks) >= region["start"]
    assert max(ticks) - min(ticks) < 0.5 * page.execute_script(
        "return JSON.parse(document.querySelector('svg.strip').dataset.span)"
    )
    page.find_element("css selector", "body").send_keys(Keys.ESCAPE)
    assert not any(page.execute_script(stretched))
    assert page.find_element("css selector", ".whole").get_attribute("aria-pressed") == "true"


def test_clicking_a_bar_zooms_to_its_region(page: webdriver.Chrome) -> None:
    lane = next(
        lane for lane in page.find_elements("css selector", '[id*="region-lane-0"] path') if lane.is_displayed()
    )
    page.execute_script("arguments[0].scrollIntoView({block: 'center'})", lane)
    ActionChains(page, duration=0).move_to_element(lane).click().perform()
    assert page.find_elements("css selector", "svg.strip .zoom-tick")


def test_the_keyboard_moves_the_mark(page: webdriver.Chrome) -> None:
    strip = _strip(page)
    page.execute_script("arguments[0].focus()", strip)
    keys = lambda *pressed: ActionChains(page, duration=0).send_keys(*pressed).perform()  # noqa: E731
    keys(Keys.HOME)
    start = _place(page)
    keys(Keys.ARROW_RIGHT, Keys.ARROW_RIGHT)
    assert _place(page) > start
    keys(Keys.ARROW_LEFT, Keys.ARROW_LEFT)
    assert _place(page) == start
    keys(Keys.END)
    assert _place(page) == pytest.approx(_length(page), rel=0.01)
    assert strip.get_attribute("aria-valuenow") == str(round(_place(page)))


def test_the_read_out_tells_the_error_that_the_strip_draws(page: webdriver.Chrome) -> None:
    _move_to(page, _strip(page), 0.5)
    told = _read_out(page)
    k = page.execute_script(
        """const data = JSON.parse(document.getElementById("linked").textContent);
           const s = parseFloat(document.querySelector("#read-out dd").textContent);
           return data.runs.map((run) => run.error[data.s.findIndex((each) => Math.abs(each - s) < 0.051)]);"""
    )
    assert told["error, <script>bare</script>"] == f"{k[0]:.2f} mm"
    assert told["error, smoothed"] == f"{k[1]:.2f} mm"
    assert {"time t", "shoulder", "elbow"} <= told.keys()


def test_nothing_overflows_at_390_pixels(page: webdriver.Chrome) -> None:
    page.execute_cdp_cmd(
        "Emulation.setDeviceMetricsOverride", {"width": 390, "height": 844, "deviceScaleFactor": 2, "mobile": True}
    )
    page.refresh()
    assert page.execute_script("return document.documentElement.scrollWidth") <= 390
    beyond = page.execute_script(
        """return [...document.querySelectorAll("body *")].filter((element) => !element.closest(".scroll, svg")
             && element.getBoundingClientRect().right > 390.5).map((element) => element.outerHTML.slice(0, 80))"""
    )
    assert beyond == []
    sizes = page.execute_script(
        """return [...document.querySelectorAll("figure svg text")].filter((text) => text.getClientRects().length)
             .map((text) => parseFloat(getComputedStyle(text).fontSize)
               * text.ownerSVGElement.getBoundingClientRect().width / text.ownerSVGElement.viewBox.baseVal.width)"""
    )
    assert min(sizes) >= 8.0


def test_a_finger_moves_the_mark(page: webdriver.Chrome) -> None:
    page.execute_cdp_cmd(
        "Emulation.setDeviceMetricsOverride", {"width": 390, "height": 844, "deviceScaleFactor": 2, "mobile": True}
    )
    page.execute_cdp_cmd("Emulation.setTouchEmulationEnabled", {"enabled": True})
    page.refresh()
    strip = _strip(page)
    page.execute_script("arguments[0].scrollIntoView({block: 'end'})", strip)
    left, top, width, height = page.execute_script(
        "const box = arguments[0].getBoundingClientRect(); return [box.left, box.top, box.width, box.height]", strip
    )
    places = []
    for share in (0.4, 0.9):
        point = {"x": left + share * width, "y": top + 0.6 * height}
        page.execute_cdp_cmd("Input.dispatchTouchEvent", {"type": "touchStart", "touchPoints": [point]})
        page.execute_cdp_cmd("Input.dispatchTouchEvent", {"type": "touchEnd", "touchPoints": []})
        places.append(_place(page))
    page.execute_cdp_cmd("Emulation.setTouchEmulationEnabled", {"enabled": False})
    assert places[1] - places[0] > 0.4 * _length(page)


def test_the_page_is_complete_without_script(browser: webdriver.Chrome, report: Path) -> None:
    browser.execute_cdp_cmd("Emulation.setScriptExecutionDisabled", {"value": True})
    try:
        browser.get((report / "report.html").as_uri())
        shown = [svg for svg in browser.find_elements("css selector", "figure svg") if svg.is_displayed()]
        assert len(shown) == len(list((report / "figures").glob("*.svg")))
        assert not any(
            element.is_displayed() for element in browser.find_elements("css selector", ".chips, .hint, #read-out")
        )
    finally:
        browser.execute_cdp_cmd("Emulation.setScriptExecutionDisabled", {"value": False})


def test_no_serious_fault_of_accessibility(page: webdriver.Chrome) -> None:
    """Axe-core, the accessibility rules of Deque Systems; ARMEVAL_AXE names its axe.min.js."""
    rules = os.environ.get("ARMEVAL_AXE", "")
    if not rules:
        pytest.skip("axe-core is not at hand: ARMEVAL_AXE names its axe.min.js")
    page.execute_script(Path(rules).read_text(encoding="utf-8"))
    found = page.execute_async_script("const done = arguments[0]; axe.run(document).then(done);")
    serious = [
        (fault["id"], [node["html"][:200] for node in fault["nodes"][:3]])
        for fault in found["violations"]
        if fault["impact"] in ("serious", "critical")
    ]
    assert serious == []
