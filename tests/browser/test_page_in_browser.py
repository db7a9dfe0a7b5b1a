"""The page in a real browser: every test also proves that it said nothing on the console and
asked for nothing but itself (see the fixture `visit`)."""

import re

import pytest

from stress.text.figure import figure

pytestmark = pytest.mark.browser


def texts(page, selector):
    return [text.replace("\xa0", " ").strip() for text in page.locator(selector).all_inner_texts()]


def shown_positions(page):
    return texts(page, "table.positions tbody tr:not([hidden]) td:nth-child(2)")


def test_it_opens_with_cautions_and_order_of_work_on_top(visit):
    page = visit.go()
    assert texts(page, "h2:visible")[:3] == [
        "Cautions", "What to do first", "The equipment at a glance"
    ]  # fmt: skip
    assert len(visit.asked) == 1
    assert page.locator("article.card").count() == 6


def test_the_slider_moves_the_numbers_to_those_of_the_document(visit, read):
    page = visit.go()
    curve = next(p for p in read["positions"] if p["name"] == "C5")["leakage"]["curve"]
    card = page.locator("article#C5")
    slider = card.locator("input[type=range]")
    marker = card.locator("svg line.now")
    places = []
    slider.focus()
    for i, point in enumerate(curve):
        if i:
            page.keyboard.press("ArrowRight")
        said = card.locator(".what-if output").inner_text()
        assert said.startswith(figure(point["ohm"], "ohm"))
        rows = {
            (row[0], row[1]): row for row in
            (line.split("\t") for line in card.locator(".what-if tbody tr").all_inner_texts())
        }  # fmt: skip
        for part, stresses in (point["stresses"] or {"XU2": {"plate_W": None}}).items():
            for stress, value in stresses.items():
                what = {"plate_W": "plate dissipation", "cathode_A": "cathode current"}.get(
                    stress, "power"
                )
                now = "unsolved" if value is None else figure(value, stress[-1])
                assert rows[part, what][3] == now
        for node, volts in point["nodes_V"].items():
            assert rows[f"node {node}", "voltage"][3] == figure(volts, "V")
        places.append(float(marker.get_attribute("x1")))
    assert places == sorted(places)
    assert len(set(places)) == len(curve)


def test_the_map_follows_a_fault_to_its_victim(visit):
    page = visit.go()
    chip = page.locator('.map .chip[data-position="C5"]')
    chip.focus()
    page.keyboard.press("Enter")
    assert chip.get_attribute("aria-pressed") == "true"
    assert page.locator(".map .device.lit .name").all_text_contents() == ["XU2"]
    assert page.locator(".map .chip.lit .name").all_text_contents() == ["C5"]
    assert (
        page.locator("#go-said")
        .inner_text()
        .startswith("C5, coupling, plate of XU1 to grid of XU2: C5 -> grid of XU2 -> XU2.")
    )
    page.keyboard.press("Space")
    assert page.locator(".map .lit").count() == 0
    chip.click()
    page.locator("#go-said a").click()
    assert page.evaluate("document.activeElement.dataset.position") == "C5"


def test_a_limit_that_is_passed_is_said_in_words(visit):
    page = visit.go()
    card = page.locator("article#C5")
    plate = card.locator(".what-if tbody tr", has_text="plate dissipation")
    assert plate.locator(".verdict").inner_text() == "within"
    card.locator("input[type=range]").fill("3")
    assert plate.locator(".verdict").inner_text() == "past its limit"


def test_sorting_by_number_up_and_down_with_words_last(visit):
    page = visit.go()
    head = page.locator("table.positions th[data-key=worst_V]")
    head.locator("button").click()
    assert head.get_attribute("aria-sort") == "ascending"
    assert shown_positions(page)[:5] == ["C2", "C7", "C1", "X3.C9", "C5"]
    head.locator("button").press("Enter")
    assert head.get_attribute("aria-sort") == "descending"
    assert shown_positions(page)[-5:] == ["C5", "X3.C9", "C1", "C7", "C2"]


def test_filter_by_what_to_do_and_by_words(visit):
    page = visit.go()
    page.select_option("#go-severity", "replace before power")
    assert shown_positions(page) == ["C5", "X3.C9"]
    assert page.locator("#go-count").inner_text() == "2 of 6 positions"
    page.fill("#go-words", "PLATE xu1")
    assert shown_positions(page) == ["C5"]
    page.select_option("#go-severity", "")
    page.fill("#go-words", "no such thing")
    assert shown_positions(page) == []


@pytest.mark.parametrize(
    "fragment", ["#C7", "#c7", "#X3.C9", "#C%22'%3Cscript%3Ealert(1)%3C/script%3E"]
)
def test_a_deep_link_leads_to_its_card(visit, fragment):
    page = visit.go(fragment)
    name = page.evaluate("document.activeElement.dataset.position")
    wanted = {"#c7": "C7", "#C7": "C7", "#X3.C9": "X3.C9"}
    assert name == wanted.get(fragment, "C\"'<script>alert(1)</script>")
    top = page.locator("article:focus").bounding_box()["y"]
    assert 0 <= top < 300


def test_finding_a_part_by_keyboard_alone(visit):
    page = visit.go()
    page.keyboard.press("/")
    page.keyboard.type("x3")
    assert page.locator("#go-found").inner_text() == "X3.C9 across the line"
    page.keyboard.press("Enter")
    assert page.evaluate("document.activeElement.dataset.position") == "X3.C9"
    assert page.url.endswith("#X3.C9")
    page.keyboard.press("/")
    page.keyboard.press("Control+A")
    page.keyboard.type("R99")
    assert page.locator("#go-found").inner_text() == "no such part"


def test_the_first_tab_stop_skips_to_the_work(visit):
    page = visit.go()
    page.keyboard.press("Tab")
    assert page.evaluate("document.activeElement.textContent") == "Skip to what to do first"
    page.keyboard.press("Enter")
    assert page.url.endswith("#go-order")


@pytest.mark.parametrize("width", [360, 800, 1400])
def test_nothing_sticks_out_sideways(visit, width):
    page = visit.go()
    page.set_viewport_size({"width": width, "height": 800})
    assert page.evaluate("document.documentElement.scrollWidth") <= width


def _luminance(colour):
    red, green, blue = (int(part) / 255 for part in re.findall(r"\d+", colour)[:3])
    linear = [
        c / 12.92 if c <= 0.04045 else ((c + 0.055) / 1.055) ** 2.4 for c in (red, green, blue)
    ]
    return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]


@pytest.mark.parametrize("scheme", ["light", "dark"])
def test_contrast_is_at_least_AA(visit, scheme):
    # Contrast and its threshold of 4.5 for text: WCAG 2.2, success criterion 1.4.3.
    page = visit.go()
    page.emulate_media(color_scheme=scheme)
    colours = page.evaluate(
        """() => ["ink", "quiet", "deep", "warm", "ground", "sheet", "wash"].map((name) => {
            const probe = document.createElement("i");
            probe.style.color = `var(--${name})`;
            document.body.append(probe);
            return [name, getComputedStyle(probe).color];
        })"""
    )
    luminance = {name: _luminance(colour) for name, colour in colours}
    for text in ("ink", "quiet", "deep", "warm"):
        for ground in ("ground", "sheet", "wash"):
            bright, dim = sorted((luminance[text], luminance[ground]), reverse=True)
            assert (bright + 0.05) / (dim + 0.05) >= 4.5, (scheme, text, ground)


# Printable height between margins of 11 mm at 96 dots an inch: A4 is 297 mm, Letter 279.4 mm.
@pytest.mark.parametrize(
    ("paper", "height_mm", "width_mm"), [("A4", 297, 210), ("Letter", 279.4, 215.9)]
)
def test_print_has_the_bench_card_on_the_first_page(visit, paper, height_mm, width_mm):
    page = visit.go()
    pdf = page.pdf(format=paper)
    assert len(re.findall(rb"/Type\s*/Page\b", pdf)) == 1
    page.emulate_media(media="print")
    page.set_viewport_size({"width": int((width_mm - 22) / 25.4 * 96), "height": 900})
    visible = texts(page, "h2:visible")
    assert visible == ["Bench card: Lantern room monitor"]
    box = page.locator(".bench-card").bounding_box()
    assert box["y"] + box["height"] <= (height_mm - 22) / 25.4 * 96
    assert page.evaluate("document.documentElement.scrollWidth") <= (width_mm - 22) / 25.4 * 96
    first = page.locator(".bench-card tbody tr").first.inner_text().replace("\xa0", " ")
    for words in ("1", "C5", "replace before power", "480 nA at 400 V", "0.018 µF to 0.027 µF"):
        assert words in first
