#!/usr/bin/python3
"""Opens reports in headless Chromium: browser_test.py REPORT_TEST SUNBUDGET SOURCE FOLDER.

Looks for console errors and requests, moves the slider, sorts the zones, chooses one on the map, and leaves
screenshots at desktop and phone width in FOLDER. Ends with 77 where there is no browser.
"""
import base64
import json
import os
import shutil
import subprocess
import sys
from pathlib import Path

try:
    from selenium import webdriver
    from selenium.webdriver.chrome.service import Service
    from selenium.webdriver.common.by import By
    from selenium.webdriver.common.keys import Keys
except ImportError:
    print("SKIPPED: python3-selenium is not installed")
    sys.exit(77)

CHROMIUM, DRIVER = shutil.which("chromium"), shutil.which("chromedriver")
if not CHROMIUM or not DRIVER:
    print("SKIPPED: chromium and chromium-driver are not installed")
    sys.exit(77)

PLAN = """\
sunbudget: 1
title: Hot months in the invented town
grid: {{like: surface, bounds: [449000, 5304000, 450000, 5304800]}}
surface: {{cover: {{raster: {town}/cover.tif, classes: worldcover}}}}
terrain: {{elevation: {town}/surface.tif, slope_from: {town}/ground.tif, directions: 16}}
sky: {{turbidity: 3.5}}
time: {{from: 2025-06-01, to: 2025-08-31, step: 1 h, days: mid-month, totals: month}}
outputs: {{directory: out, layers: [net_shortwave, albedo, sky_view, quality]}}
zones: {{file: {town}/parcels.gpkg, id: parcel_id, layers: [net_shortwave]}}
changes:
  - {{name: pale-roofs, where: {{file: {town}/roofs.gpkg, query: "kind = 'flat'"}}, albedo: {{aged: 0.65}}, cost: 22}}
report: {{html: true, layers: [net_shortwave, albedo, quality]}}
"""

failures = []


def check(holds, what):
    if not holds:
        failures.append(what)
        print("FAILED:", what)


def browser():
    options = webdriver.ChromeOptions()
    options.binary_location = CHROMIUM
    for word in ("--headless=new", "--no-sandbox", "--disable-dev-shm-usage", "--disable-gpu", "--force-color-profile=srgb"):
        options.add_argument(word)
    options.set_capability("goog:loggingPrefs", {"browser": "ALL", "performance": "ALL"})
    return webdriver.Chrome(service=Service(DRIVER), options=options)


def width(driver, pixels, height):
    driver.execute_cdp_cmd("Emulation.setDeviceMetricsOverride",
                           {"width": pixels, "height": height, "deviceScaleFactor": 1, "mobile": pixels < 600})


def screenshot(driver, file):
    size = driver.execute_cdp_cmd("Page.getLayoutMetrics", {})["cssContentSize"]
    clip = {"x": 0, "y": 0, "width": size["width"], "height": min(size["height"], 12000), "scale": 1}
    shot = driver.execute_cdp_cmd("Page.captureScreenshot", {"captureBeyondViewport": True, "clip": clip})
    file.write_bytes(base64.b64decode(shot["data"]))


def requests(driver):
    for entry in driver.get_log("performance"):
        message = json.loads(entry["message"])["message"]
        if message["method"] == "Network.requestWillBeSent":
            yield message["params"]["request"]["url"]


def column(driver, table, index):
    return driver.execute_script("return [...arguments[0].tBodies[0].rows].map(row => row.cells[arguments[1]].dataset.value ?? row.cells[arguments[1]].textContent)",
                                 table, index)


def try_slider(driver, page):
    for slider in driver.find_elements(By.CSS_SELECTOR, ".slider input"):
        box = driver.find_element(By.ID, slider.get_attribute("data-map"))
        split = lambda: driver.execute_script("return getComputedStyle(arguments[0]).getPropertyValue('--split').trim()", box)
        after = box.find_element(By.CSS_SELECTOR, "img.after")
        check(split() == "50%", f"{page}: the slider starts in the middle, found {split()}")
        slider.send_keys(Keys.ARROW_RIGHT)
        check(split() == "51%", f"{page}: an arrow key moves the slider, found {split()}")
        slider.send_keys(Keys.END)
        check("100%" in after.value_of_css_property("clip-path"), f"{page}: at its end the change is hidden")
        check("100 percent" in slider.get_attribute("aria-valuetext"), f"{page}: the slider says where it stands")
        driver.execute_script("arguments[0].value = 30; arguments[0].dispatchEvent(new Event('input'))", slider)


def try_table(driver, page):
    for table in driver.find_elements(By.CSS_SELECTOR, "table[data-said]"):
        headings = table.find_elements(By.CSS_SELECTOR, "thead th")
        last = len(headings) - 1
        before = column(driver, table, last)
        for direction in ("ascending", "descending"):
            headings[last].find_element(By.TAG_NAME, "button").send_keys(Keys.ENTER)
            check(headings[last].get_attribute("aria-sort") == direction, f"{page}: the heading says {direction}")
            found = column(driver, table, last)
            numbers = [float(text) for text in found if text]
            check(numbers == sorted(numbers, reverse=direction == "descending"), f"{page}: sorted {direction}")
            check(sorted(found) == sorted(before), f"{page}: no row is lost")
            check(not any(found[len(numbers):]), f"{page}: rows without a value come last")
        check(direction in driver.find_element(By.ID, table.get_attribute("data-said")).text, f"{page}: sorting is said aloud")
        row = table.find_elements(By.CSS_SELECTOR, "tbody tr")[0]
        zone = row.get_attribute("data-zone")
        row.find_element(By.TAG_NAME, "button").click()
        outline = driver.find_element(By.ID, f"zone-{zone}")
        check("chosen" in outline.get_attribute("class"), f"{page}: a chosen zone is marked on the map")
        other = table.find_elements(By.CSS_SELECTOR, "tbody tr")[1]
        driver.execute_script("arguments[0].dispatchEvent(new MouseEvent('click', {bubbles: true}))",
                              driver.find_element(By.ID, "zone-" + other.get_attribute("data-zone")))
        check("chosen" in other.get_attribute("class"), f"{page}: a zone chosen on the map is marked in the table")
        check(other.find_element(By.TAG_NAME, "button").get_attribute("aria-pressed") == "true", f"{page}: and says so")


def look_at_structure(driver, page):
    ask = driver.execute_script
    check(ask("return document.documentElement.lang") == "en", f"{page}: the language is told")
    check(ask("return document.querySelectorAll('h1').length") == 1, f"{page}: one title")
    check(ask("return [...document.images].every(i => i.alt.length > 10 && i.complete && i.naturalWidth > 0)"), f"{page}: every picture is there and described")
    check(ask("return [...document.querySelectorAll('svg[role=img]')].every(s => s.getAttribute('aria-label'))"), f"{page}: charts are described")
    check(ask("return [...document.querySelectorAll('input')].every(i => i.labels.length === 1)"), f"{page}: inputs have labels")
    check(ask("return [...document.querySelectorAll('th')].every(t => t.scope)"), f"{page}: headings of tables have a scope")
    check(ask("return ['header','nav','main','footer'].every(n => document.querySelectorAll('body ' + n).length >= 1)"), f"{page}: landmarks")
    check(ask("const ids = [...document.querySelectorAll('[id]')].map(e => e.id); return new Set(ids).size === ids.length"), f"{page}: every id once")
    check(ask("return [...document.querySelectorAll('nav a')].every(a => document.querySelector(a.getAttribute('href')))"), f"{page}: links lead somewhere")
    levels = ask("return [...document.querySelectorAll('h1,h2,h3,h4')].map(h => +h.tagName[1])")
    check(all(b - a <= 1 for a, b in zip(levels, levels[1:])), f"{page}: no level of headings is skipped")
    driver.find_element(By.TAG_NAME, "body").send_keys(Keys.TAB)
    check(ask("return document.activeElement.className") == "skip", f"{page}: the first stop of the keyboard leads to the content")


def visit(driver, file, folder):
    page = file.stem
    driver.get(file.as_uri())
    width(driver, 1280, 900)
    look_at_structure(driver, page)
    screenshot(driver, folder / f"{page}-desktop.png")
    try_slider(driver, page)
    try_table(driver, page)
    screenshot(driver, folder / f"{page}-used.png")
    width(driver, 390, 844)
    check(driver.execute_script("return document.documentElement.scrollWidth <= window.innerWidth"), f"{page}: fits a phone's width")
    screenshot(driver, folder / f"{page}-phone.png")
    pdf = driver.execute_cdp_cmd("Page.printToPDF", {"printBackground": False})["data"]
    (folder / f"{page}.pdf").write_bytes(base64.b64decode(pdf))
    errors = [entry["message"] for entry in driver.get_log("browser")]
    check(not errors, f"{page}: the console says {errors}")
    outside = [url for url in requests(driver) if url != file.as_uri() and not url.startswith("data:")]
    check(not outside, f"{page}: asked for {outside}")


def run(words, **more):
    done = subprocess.run(words, capture_output=True, text=True, **more)
    if done.returncode != 0:
        sys.exit(f"{words}: {done.stdout}{done.stderr}")


def main():
    report_test, program, source, folder = sys.argv[1], sys.argv[2], Path(sys.argv[3]), Path(sys.argv[4])
    folder.mkdir(parents=True, exist_ok=True)
    page = folder / "invented.html"
    run([report_test, "report: a page for the browser"], env={**os.environ, "SUNBUDGET_PAGE": str(page)})
    town = folder / "town"
    if not town.exists():
        part = folder / "town.part"
        shutil.rmtree(part, ignore_errors=True)
        run(["/usr/bin/python3", str(source / "pipelines/make_demo_town"), str(part)])
        part.rename(town)
    (folder / "town.yaml").write_text(PLAN.format(town=town))
    run([program, "run", str(folder / "town.yaml"), "--fresh", "--quiet"])
    driver = browser()
    try:
        for file in (page, folder / "out" / "report.html"):
            visit(driver, file, folder)
    finally:
        driver.quit()
    print(f"{len(failures)} failures; screenshots in {folder}")
    sys.exit(1 if failures else 0)


if __name__ == "__main__":
    main()
