"""The circuit map of the specimen and of the reference equipment."""

import re
from dataclasses import replace
from itertools import combinations
from pathlib import Path

import pytest

from stress.circuit.joined import GROUND
from stress.pipeline import load
from stress.report.circuit_layout import layout
from stress.report.circuit_map import circuit_map

NETLISTS = sorted(Path(__file__).parents[2].joinpath("netlists").glob("*.cir"))


@pytest.fixture(scope="module")
def picture(specimen):
    return circuit_map(specimen)


def attributes(picture, class_):
    return re.findall(rf'<\w+ [^>]*class="{class_}[^>]*>', picture.svg)


def test_every_position_has_a_chip_with_its_line_style(specimen, picture):
    chips = attributes(picture, "chip")
    assert len(chips) == len(specimen.circuit.positions)
    c5 = next(chip for chip in chips if 'data-position="C5"' in chip)
    assert 'class="chip replace-before-power"' in c5
    assert 'aria-label="C5: replace before power"' in c5


def test_the_chain_runs_from_the_leak_through_the_grid_to_the_victim(picture):
    device = next(g for g in attributes(picture, "device") if "C5" in g)
    assert 'data-chain="C5"' in device
    assert picture.svg.count('data-chain="C5"') == 5  # line, net g2, pin, XU2, chip
    assert picture.said["C5"].endswith("C5 -> grid of XU2 -> XU2.")
    assert picture.said["C2"].endswith("its faults hit no known limit.")


def test_mischief_stays_text(picture):
    assert "<script" not in picture.svg


def boxes(svg):
    found = re.findall(r'class="chip [^>]*>.*?<rect x="([\d.-]+)" y="([\d.-]+)"', svg)
    return [(float(x), float(y)) for x, y in found]


@pytest.mark.parametrize("path", NETLISTS, ids=lambda path: path.stem)
def test_reference_equipment(specimen, path):
    circuit = load(path)
    placed = layout(circuit, volts={})
    drawn = [link.parts[0] for link in placed.links if link.position]
    assert sorted(drawn) == sorted(p.name for p in circuit.positions)
    # no net is at the place of another, and all is within the picture
    assert len({*placed.dots.values()}) == len(placed.dots)
    for x, y in [*placed.dots.values(), *placed.devices.values()]:
        assert 0 < x < placed.width
        assert 0 < y < placed.height
    svg = circuit_map(replace(specimen, circuit=circuit)).svg
    chips = boxes(svg)
    assert len(chips) == len(circuit.positions)
    covered = [
        (a, b) for a, b in combinations(chips, 2) if abs(a[0] - b[0]) < 58 and abs(a[1] - b[1]) < 30
    ]
    assert covered == []


def test_the_signal_goes_right_and_higher_is_more_positive():
    circuit = load(next(path for path in NETLISTS if path.stem == "shore_receiver"))
    volts = {"b0": 310.0, "b1": 250.0, "p4": 240.0, "p3": 110.0, "k4": 12.5, "go": -40.0}
    placed = layout(circuit, volts=volts)
    tubes = sorted(placed.devices, key=lambda name: placed.devices[name][0])
    assert tubes == ["XV5", "XV1", "XV2", "XV3", "XV4"]  # rectifier, converter … output
    heights = [placed.rails["b1"][2], *(placed.dots[n][1] for n in ("p4", "p3", "k4"))]
    assert heights == sorted(heights)
    assert placed.dots["k4"][1] < placed.rails[GROUND][2] < placed.dots["go"][1]
