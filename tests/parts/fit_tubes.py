"""Fits the built-in tube models to the published lines of the type table.

Run by hand when a line changes: `python tests/parts/fit_tubes.py`; it rewrites
stress/parts/model_table/. What is fixed or added for a type stands in fit_recipe.toml.
"""

from __future__ import annotations

import sys
import tomllib
from pathlib import Path

import numpy as np
from scipy.optimize import least_squares

from stress.parts import types as type_table
from stress.parts.model import layout
from stress.parts.type import TypeEntry

HERE = Path(__file__).parent
OUT = Path(type_table.__file__).parent / "model_table"


def softplus(x):
    return np.maximum(x, 0) + np.log1p(np.exp(-np.abs(x)))


def triode_A(p, vp, vg):
    x = p["KP"] * (1 / p["MU"] + vg / np.sqrt(p["KVB"] + vp * vp))
    return 2 / p["KG1"] * (np.maximum(vp, 0) / p["KP"] * softplus(x)) ** p["EX"]


def pentode_A(p, vp, vs, vg):
    """Return plate and screen current; a converter has its signal grid at vg, grid 1 at 0."""
    drive = 0.0 if "S3" in p else vg
    w = np.sqrt(vs * vs + 100) / p["KP"]
    space = 2 / p["KG1"] * (w * softplus((drive + vs / p["MU"] + vp / p["MUA"]) / w)) ** p["EX"]
    wide = vs * vs + 100
    share = 2 / np.pi * np.arctan(vp * vp / (vp + 1) / (p["KVS"] * np.sqrt(wide)))
    share = share * (1 - p["S0"] * (2 * wide / (wide + vp * vp)) ** p["H"])
    if "S3" in p:
        share = share / (1 + np.exp(-(vg - p["V3"]) / p["S3"]))
    return space * share, space * (1 - share) * vs * vs / (vs * vs + 4)


def derived(p, form, row):
    """Return plate current, screen current, gm, mu and plate resistance of a line."""
    h = 1e-3
    if form == "triode":

        def plate(vp, vg):
            return triode_A(p, vp, vg)

        a = plate(row.plate_V, row.grid_V)
        gm = (plate(row.plate_V, row.grid_V + h) - plate(row.plate_V, row.grid_V - h)) / (2 * h)
        gp = (plate(row.plate_V + h, row.grid_V) - plate(row.plate_V - h, row.grid_V)) / (2 * h)
        return a, None, gm, gm / gp, 1 / gp
    vs = row.screen_V

    def both(vp, vs, vg):
        return np.array(pentode_A(p, vp, vs, vg))

    a, s = both(row.plate_V, vs, row.grid_V)
    gm = (both(row.plate_V, vs, row.grid_V + h) - both(row.plate_V, vs, row.grid_V - h))[0] / 2 / h
    gp = (both(row.plate_V + h, vs, row.grid_V) - both(row.plate_V - h, vs, row.grid_V))[0] / 2 / h
    return a, s, gm, p["MU"], 1 / gp


def residuals(p, form, rows, points):
    out = []
    for row in rows:
        a, s, gm, mu, rp = derived(p, form, row)
        loose = 60.0 if row.cutoff else 1.0
        for got, want, width in (
            (a, row.plate_A, 0.02),
            (s, row.screen_A, 0.02),
            (gm, row.gm_S, 0.03),
            (mu, row.mu, 0.05),
            (rp, row.plate_ohm, 0.3),
        ):
            if want is not None and got is not None:
                out.append(np.log(max(got, 1e-12) / want) / (width * loose))
    for *volts, milliampere in points:
        got = triode_A(p, *volts) if form == "triode" else pentode_A(p, *volts)[0]
        out.append(np.log(max(got, 1e-12) * 1e3 / milliampere) / 0.05)
    return out


def fit(entry: TypeEntry, form: str, rows, recipe):
    """Return the parameters of one unit that come closest to its lines and points."""
    first = next(row for row in rows if not row.cutoff)
    guess = {"EX": (1.4, 0.03)}  # value and width, the latter in parts of the value
    if form == "triode":
        mu = first.mu or first.gm_S * first.plate_ohm
        guess |= {"MU": (mu, 0.05), "KP": (6 * mu, 0.7), "KVB": (300.0, 1.0)}
    else:
        mu = first.mu or 8.0
        guess |= {
            "MU": (
                first.mu or 8.0 if first.plate_A > 0.02 else first.mu or 20.0,
                0.05 if first.mu else 0.5,
            ),
            "KP": (5 * mu, 0.7),
            "MUA": (min(max((first.gm_S or 1e-3) * (first.plate_ohm or 1e6), 60.0), 5000.0), 0.5),
            "KVS": (0.04 if entry.family == "beam tube" else 0.07, 0.2),
        }
        guess["H"] = (0.9, 0.5) if entry.family == "beam tube" else (0.15, 1.0)
        if entry.remote:
            guess |= {"MU": (20.0, 1.0), "KP": (12.0, 1.0)}
    if form == "converter":
        guess |= {"MU": (15.0, 0.01), "KP": (100.0, 0.01), "S3": (7.5, 0.3)}
    for name, pair in recipe.get("guess", {}).items():
        guess[name] = tuple(pair)
    guess["KG1"] = (1000.0, 100.0)
    names = list(guess)
    extra = (["S0"] if form != "triode" else []) + (["V3"] if form == "converter" else [])
    middle = np.array([np.log(guess[n][0]) for n in names] + [-3.0, 0.0][: len(extra)])
    width = np.array([np.log1p(guess[n][1]) for n in names] + [5.0, 10.0][: len(extra)])

    def values(x):
        p = {n: float(np.exp(v)) for n, v in zip(names, x, strict=False)}
        if form != "triode":
            p["S0"] = float(1 / (1 + np.exp(-x[len(names)])))
        if form == "converter":
            p["V3"] = float(x[len(names) + 1])
        return p

    points = recipe.get("points", [])

    def off(x):
        return [*residuals(values(x), form, rows, points), *((x - middle) / width)]

    best = least_squares(off, middle, method="trf", x_scale=width)
    return values(best.x)


JUNCTIONS = {  # ideality, and the share of the stated drop that is ohmic; common practice
    "silicon rectifier": (1.9, 0.1),
    "silicon diode": (1.9, 0.1),
    "germanium diode": (1.6, 0.6),
    "selenium stack": (12.0, 0.5),  # half a dozen plates in series
}
CAPACITANCES_F = {  # order of magnitude of the class, common practice
    "triode": (2e-12, 2e-12, 1e-12),
    "pentode": (6e-12, 0.01e-12, 7e-12),
    "power": (12e-12, 0.5e-12, 8e-12),
    "converter": (8e-12, 0.2e-12, 10e-12),
}


def parameters(entry: TypeEntry, form: str, p: dict) -> list[str]:
    """Return the parameters as TOML, with the grid and the capacitances of the class."""
    top = max((row.plate_A or 0) for row in entry.operation)
    kind = "power" if form == "pentode" and top > 0.015 else form
    big = kind == "power" or top > 0.015
    p = {**p, "GG": 1e-3 if big else 3e-4}
    p |= dict(zip(("CGK", "CGP", "CPK"), CAPACITANCES_F[kind], strict=True))
    return [f"{name} = {value:.5g}" for name, value in p.items()]


def errors(p, form: str, rows, points) -> dict[str, float]:
    """Return the largest error of each quantity over the lines, and of the curve points."""
    off: dict[str, float] = {}

    def note(key, got, want):
        if want is not None and got is not None:
            off[key] = max(off.get(key, 0.0), abs(got / want - 1))

    for row in rows:
        if row.cutoff:
            continue
        a, s, gm, _mu, _rp = derived(p, form, row)
        note("plate", a, row.plate_A)
        note("screen", s, row.screen_A)
        note("gm", gm, row.gm_S)
    for *volts, milliampere in points:
        got = triode_A(p, *volts) if form == "triode" else pentode_A(p, *volts)[0]
        note("curves", got * 1e3, milliampere)
    return off


def unit_lines(entry: TypeEntry, number: int, form: str, pins, recipe) -> tuple[list[str], dict]:
    """Return the numbers of one unit as TOML, and how far off they are."""
    if form == "rectifier":
        return [f"K = {entry.drop_A / entry.drop_V**1.5:.5g}"], {}
    if form == "arc":  # 0.4 V of the drop grows with the current; width 0.3 V for the solver
        start_V = entry.drop_V - 0.3 * np.log(np.expm1(0.4 / 0.3))
        resistance = f"RARC = {0.4 / entry.drop_A:.4g}"
        return [f"VARC = {start_V:.5g}", "WARC = 0.3", resistance], {}
    if form == "junction":
        ideality, ohmic = JUNCTIONS[entry.family]
        volts = entry.drop_V * (1 - ohmic) / (ideality * 0.025865)
        saturation, ohms = entry.drop_A / np.expm1(volts), ohmic * entry.drop_V / entry.drop_A
        return [f"IS = {saturation:.5g}", f"N = {ideality}", f"RS = {ohms:.4g}"], {}
    if form == "diode":  # 2 mA at 10 V for those inside amplifiers: from memory, to be confirmed
        k = entry.drop_A / entry.drop_V**1.5 if entry.drop_V else 2e-3 / 10**1.5
        return [f"K = {k:.4g}", "CD = 2e-12"], {}
    rows = [row for row in entry.operation if row.unit == number]
    p = fit(entry, form, rows, recipe)
    return parameters(entry, form, p), errors(p, form, rows, recipe.get("points", []))


def main() -> None:
    recipes = tomllib.loads((HERE / "fit_recipe.toml").read_text(encoding="utf-8"))
    files: dict[str, list[str]] = {}
    for entry in type_table.all_types():
        units = layout(entry)
        if entry.model != entry.name or not units:
            continue
        out, off = [], {}
        for number, (form, pins) in enumerate(units, 1):
            name = entry.name if number == 1 else f"{entry.name}/{number}"
            lines, worst = unit_lines(entry, number, form, pins, recipes.get(name, {}))
            names = ", ".join(f'"{pin}"' for pin in pins)
            out += [f'[["{entry.name}".unit]]', f'form = "{form}"', f"pins = [{names}]", *lines]
            off = {key: max(value, off.get(key, 0.0)) for key, value in (off | worst).items()}
        fit_line = ", ".join(f"{key} = {value:.3f}" for key, value in off.items())
        print(f"{entry.name:8} {fit_line}")
        head = [f'["{entry.name}"]', f"fit = {{ {fit_line} }}"] if off else [f'["{entry.name}"]']
        files.setdefault(units[0][0], []).extend([*head, *out, ""])
    for stem, lines in files.items():
        head = "# Written by tests/parts/fit_tubes.py; laws in stress/parts/model_text.py.\n\n"
        (OUT / f"{stem}.toml").write_text(head + "\n".join(lines), encoding="utf-8")


if __name__ == "__main__":
    sys.exit(main())
