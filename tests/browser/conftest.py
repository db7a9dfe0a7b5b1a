"""A real Chromium and the page of the specimen review."""

import os
import shutil
from importlib.util import module_from_spec, spec_from_file_location
from pathlib import Path

import pytest
from playwright.sync_api import sync_playwright

from stress.report.document import document
from stress.report.page import write_page

FLAGS = [
    "--no-sandbox",
    "--disable-gpu",
    "--disable-quic",
    "--no-first-run",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-sync",
]


@pytest.fixture(scope="session")
def review():
    """The specimen of the report tests, written by hand."""
    place = Path(__file__).parents[1] / "report" / "conftest.py"
    spec = spec_from_file_location("specimen", place)
    module = module_from_spec(spec)
    spec.loader.exec_module(module)
    return module.written_by_hand()


@pytest.fixture(scope="session")
def read(review):
    """The JSON document of the same review."""
    return document(review)


@pytest.fixture(scope="session")
def address(review, tmp_path_factory):
    path = tmp_path_factory.mktemp("page") / "review.html"
    write_page(review, path)
    return path.as_uri()


@pytest.fixture(scope="session")
def chromium():
    program = (
        os.environ.get("CHROMIUM") or shutil.which("chromium") or shutil.which("chromium-browser")
    )
    assert program, "the browser tests need Chromium: apt-get install chromium"
    with sync_playwright() as playwright:
        browser = playwright.chromium.launch(executable_path=program, args=FLAGS)
        yield browser
        browser.close()


class Visit:
    """One open page, with everything that it said and asked for."""

    def __init__(self, page, address):
        self.page, self.said, self.asked = page, [], []
        page.on("console", lambda message: self.said.append(message.text))
        page.on("pageerror", lambda error: self.said.append(str(error)))
        page.on("dialog", lambda dialog: (self.said.append(dialog.message), dialog.dismiss()))
        page.on("request", lambda request: self.asked.append(request.url))
        self.address = address

    def go(self, fragment=""):
        self.page.goto(self.address + fragment)
        return self.page


@pytest.fixture
def visit(chromium, address):
    context = chromium.new_context(viewport={"width": 1400, "height": 900}, reduced_motion="reduce")
    seen = Visit(context.new_page(), address)
    yield seen
    context.close()
    assert seen.said == []
    assert {url.partition("#")[0] for url in seen.asked} <= {address}
