"""Draws the readings of a plant: designs one true state that closes, then adds seeded noise.

    python draw.py PLANT [--typical]

The design of each plant is in `designs.py`: values that a designer would choose, given to the same equations as
weighted targets, so that the truth closes exactly. Each reading is truth + sigma x standard normal, rounded
as an instrument would show it. With --typical every tag's `typical` in the plant file is written anew as the rounded truth.
"""

import pathlib
import re
import sys

import numpy as np

import designs
import readings
import units
from balance import Balance
from model import Model, tag_sigma

PLANTS = pathlib.Path(__file__).parent.parent / "plants"
_TIMES = ["2026-02-10T06:00:00Z", "2026-02-10T14:00:00Z", "2026-02-10T22:00:00Z"]


def truth(name):
    """True value of every quantity, SI."""
    model = Model(PLANTS / f"{name}.toml", targets=designs.TARGETS[name], starts=designs.STARTS[name])
    balance = Balance(model)
    parameters = balance.parameters()
    x, _, residual = balance.solve(parameters)
    square, degrees, values, _, touched = balance.uncertainty(x, parameters)
    print(
        f"{name}: design {balance.status}, sum of squares {square:.3g}, degrees of freedom {degrees}, "
        f"null directions {balance.null_directions}, residual {residual:.1e}"
    )
    for quantity, free in zip(balance.quantities, touched):
        if free:
            print("  not fixed by the design:", quantity)
    return dict(zip(balance.quantities, values))


def in_unit(entry, true):
    """What a perfect instrument shows."""
    sign, plain = units.reference(entry["unit"])
    value = true[entry["reads"]]
    if sign:
        value = sign * (value - true["surroundings.pressure"])
    scale, offset = units._UNITS[plain]
    return (value - offset) / scale


def digits(entry, shown):
    """Decimals that show about a fiftieth of the standard deviation."""
    sigma = tag_sigma(entry, shown) / units.factor(entry["unit"])
    return max(0, int(np.ceil(-np.log10(sigma / 20))))


def main():
    name = sys.argv[1]
    true = truth(name)
    model = Model(PLANTS / f"{name}.toml", targets=designs.TARGETS[name], starts=designs.STARTS[name])
    tags = model.plant["tags"]
    true.setdefault("surroundings.pressure", model.ambient)
    shown = {tag: in_unit(entry, true) for tag, entry in tags.items()}
    if "--typical" in sys.argv:
        write_typical(PLANTS / f"{name}.toml", tags, shown)
    random = np.random.default_rng(designs.SEEDS[name])
    rows = []
    for time in _TIMES:
        cells = []
        for tag, entry in tags.items():
            sigma = tag_sigma(entry, shown[tag]) / units.factor(entry["unit"])
            cells.append(f"{shown[tag] + sigma * random.standard_normal():.{digits(entry, shown[tag])}f}")
        rows.append((time, cells))
    readings.write(PLANTS / f"{name}.csv", tags, rows)


def write_typical(path, tags, shown):
    text = path.read_text()
    for tag, entry in tags.items():
        places = max(0, digits(entry, shown[tag]) - 1)
        line = f"typical = {shown[tag]:.{places}f}\n"
        table = re.search(rf"\[tags\.{re.escape(tag)}\]\n(?:[^\[\n][^\n]*\n)*", text)
        body = re.sub(r"^typical = .*\n", "", table.group(0), flags=re.M)
        body = re.sub(r"^description = ", line + "description = ", body, flags=re.M)
        text = text[: table.start()] + body + text[table.end() :]
    path.write_text(text)


if __name__ == "__main__":
    main()
