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
    share = p["SHARE"] * 2 / np.pi * np.arctan(vp * vp / (vp + 1) / p["KVB"])
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
        out.append(np.log(max(got, 1e-12) * 1e3 / milliampere) / 0.1)
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
            "KVB": (12.0 if entry.family == "beam tube" else 22.0, 0.3),
        }
        if entry.remote:
            guess |= {"MU": (20.0, 1.0), "KP": (12.0, 1.0)}
    if form == "converter":
        guess |= {"MU": (15.0, 0.01), "KP": (100.0, 0.01), "S3": (7.5, 0.3)}
    for name, pair in recipe.get("guess", {}).items():
        guess[name] = tuple(pair)
    guess["KG1"] = (1000.0, 100.0)
    names = list(guess)
    extra = (["SHARE"] if form != "triode" else []) + (["V3"] if form == "converter" else [])
    middle = np.array([np.log(guess[n][0]) for n in names] + [3.0, 0.0][: len(extra)])
    width = np.array([np.log1p(guess[n][1]) for n in names] + [5.0, 10.0][: len(extra)])

    def values(x):
        p = {n: float(np.exp(v)) for n, v in zip(names, x, strict=False)}
        if form != "triode":
            p["SHARE"] = float(1 / (1 + np.exp(-x[len(names)])))
        if form == "converter":
            p["V3"] = float(x[len(names) + 1])
        return p

    points = recipe.get("points", [])

    def off(x):
        return [*residuals(values(x), form, rows, points), *((x - middle) / width)]

    best = least_squares(off, middle, method="trf", x_scale=width)
    return values(best.x)


CAPACITANCES_F = {  # order of magnitude of the class, common practice
    "triode": (2e-12, 2e-12, 1e-12),
    "pentode": (6e-12, 0.01e-12, 7e-12),
    "power": (12e-12, 0.5e-12, 8e-12),
    "converter": (8e-12, 0.2e-12, 10e-12),
}


def table(entry: TypeEntry, form, p, pins):
    kind = form
    top = max((row.plate_A or 0) for row in entry.operation)
    if form == "pentode" and top > 0.015:
        kind = "power"
    gg = {"triode": 3e-4, "pentode": 3e-4, "power": 1e-3, "converter": 3e-4}[kind]
    if form == "triode" and top > 0.015:
        gg = 1e-3
    p = {**p, "GG": gg, **dict(zip(("CGK", "CGP", "CPK"), CAPACITANCES_F[kind], strict=True))}
    lines = [f'form = "{form}"', f"pins = {list(pins)}".replace("'", '"')]
    lines += [f"{name} = {float(f'{value:.5g}')!r}" for name, value in p.items()]
    return lines


def main() -> None:
    recipes = tomllib.loads((HERE / "fit_recipe.toml").read_text(encoding="utf-8"))
    files: dict[str, list[str]] = {}
    for entry in type_table.all_types():
        if entry.model != entry.name:
            continue
        for number, (form, pins) in enumerate(layout(entry)):
            recipe = recipes.get(entry.name if number == 0 else f"{entry.name}/{number + 1}", {})
            rows = [row for row in entry.operation if row.unit == number + 1]
            if form == "rectifier":
                lines = ['form = "rectifier"', f"pins = {list(pins)}".replace("'", '"')]
                lines.append(f"K = {float(f'{entry.drop_A / entry.drop_V**1.5:.5g}')!r}")
            elif form == "arc":
                # 1 V of the drop belongs to the current it is stated at.
                lines = ['form = "arc"', f"pins = {list(pins)}".replace("'", '"')]
                lines += [f"VARC = {entry.drop_V - 1.0}", "WARC = 0.3"]
                lines.append(f"RARC = {float(f'{1.0 / entry.drop_A:.4g}')!r}")
            elif form == "diode":
                k = entry.drop_A / entry.drop_V**1.5 if entry.drop_V else 6.3e-5
                lines = ['form = "diode"', f"pins = {list(pins)}".replace("'", '"')]
                lines += [f"K = {float(f'{k:.4g}')!r}", "CD = 2e-12"]
            else:
                p = fit(entry, form, rows, recipe)
                lines = table(entry, form, p, pins)
                for row in rows:
                    a, s, gm, mu, rp = derived(p, form, row)
                    print(
                        entry.name,
                        row.plate_V,
                        row.grid_V,
                        *(
                            f"{g * 1e3:.3f}/{w * 1e3:.3f}"
                            for g, w in ((a, row.plate_A), (s, row.screen_A), (gm, row.gm_S))
                            if g and w
                        ),
                        f"mu {mu:.1f}/{row.mu} rp {rp:.3g}/{row.plate_ohm}",
                    )
                for *volts, want in recipe.get("points", []):
                    got = 1e3 * (
                        triode_A(p, *volts) if form == "triode" else pentode_A(p, *volts)[0]
                    )
                    print("   ", volts, f"{got:.2f}/{want}")
                print("   ", {k: float(f"{v:.4g}") for k, v in p.items()})
            files.setdefault(
                "triode"
                if form == "triode"
                else "diode"
                if form in ("rectifier", "arc", "diode")
                else "pentode",
                [],
            ).extend([f'[["{entry.name}"]]', *lines, ""])
    for stem, lines in files.items():
        head = "# Written by tests/parts/fit_tubes.py; laws in stress/parts/model_text.py.\n\n"
        (OUT / f"{stem}.toml").write_text(head + "\n".join(lines), encoding="utf-8")


if __name__ == "__main__":
    sys.exit(main())
