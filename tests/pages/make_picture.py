"""Make results/lap_shear/report.png, the picture in README.md: the first page of the demonstration's report.

python tests/pages/make_picture.py, after workbench run experiments/lap_shear.toml; needs Chromium.
"""

import shutil
from pathlib import Path

from playwright.sync_api import sync_playwright

FOLDER = Path(__file__).parents[2] / "results" / "lap_shear"
FLAGS = ["--no-sandbox", "--disable-gpu", "--disable-background-networking", "--no-first-run"]


def main():
    """Photograph the report's decision and what was asked."""
    with sync_playwright() as driver:
        browser = driver.chromium.launch(executable_path=shutil.which("chromium"), args=FLAGS)
        page = browser.new_page(viewport={"width": 1010, "height": 1230})
        page.goto((FOLDER / "report.html").as_uri())
        page.screenshot(path=FOLDER / "report.png", clip={"x": 0, "y": 0, "width": 1010, "height": 1230})
        browser.close()


if __name__ == "__main__":
    main()
