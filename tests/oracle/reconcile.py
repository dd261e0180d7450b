"""Balances every row of a plant's readings and stores what the program is held against.

    python reconcile.py PLANT [PLANT ...]      writes ../plants/expected/PLANT.json

Sums of squares, degrees of freedom, values and standard uncertainties in SI (Pa absolute, K, kg/s, J/kg, W, ratios).
A quantity is unobservable if the null space touches it or its standard uncertainty exceeds what it can span (a
pressure: its value; 100 K; 500 kJ/kg; 100 points; the largest flow or power read or given softly); its value and sigma are then left out.
"""

import json
import pathlib
import sys

import casadi
import iapws
import numpy as np

import if97
import readings
from balance import Balance
from model import Model

POWERS = ("power", "electric_power", "duty", "heat_loss", "loss")
PLANTS = pathlib.Path(__file__).parent.parent / "plants"


def limit(balance, quantity, value):
    """Largest standard uncertainty with which a quantity still counts as known."""
    what = quantity.rpartition(".")[2] if not quantity.split(".")[-2:-1] == ["efficiency"] else "efficiency"
    read = {m.quantity: abs(m.reading) for m in balance.model.measurements}
    if what == "pressure" or what.endswith(("pressure_drop", "pressure_rise", "drum_pressure")):
        return abs(value) if what in ("pressure", "drum_pressure") else np.inf
    if what == "temperature":
        return 100.0
    if what == "enthalpy":
        return 500e3
    if what in ("efficiency", "quality"):
        return 1.0
    if what == "mass_flow":
        return max((size for name, size in read.items() if name.endswith(".mass_flow")), default=np.inf)
    if what in POWERS:
        return max((size for name, size in read.items() if name.rpartition(".")[2] in POWERS), default=np.inf)
    return np.inf


def balance_row(balance, parameters):
    """One balance as the stored form has it, with what was checked on the way."""
    x, _, residual = balance.solve(parameters)
    assert residual < 1e-9, f"Karush-Kuhn-Tucker residual {residual:.1e} ({balance.status})"
    assert not np.any((x < balance.lower) | (x > balance.upper)), "a bound was reached"
    square, degrees, values, sigma, touched = balance.uncertainty(x, parameters)
    assert abs(balance.redundancies.sum() - degrees) < 1e-6
    stored, unobservable = {}, []
    for name, value, spread, free in zip(balance.quantities, values, sigma, touched):
        if name in balance.model.exact:
            value, spread = balance.model.exact[name], 0.0
        if free or spread > limit(balance, name, value):
            unobservable.append(name)
        else:
            stored[name] = {"value": float(value), "sigma": float(spread)}
            if name.endswith(".mass_flow") and value < 0:
                print("  negative flow:", name, value)
    return {
        "sum_of_squares": square,
        "degrees_of_freedom": degrees,
        "values": stored,
        "unobservable": unobservable,
    }, residual


def load(name):
    path = PLANTS / f"{name}.toml"
    rows = readings.read(PLANTS / f"{name}.csv")
    return [(time, Model(path, readings=row)) for time, row in rows]


def main():
    if97.verify()
    for name in sys.argv[1:]:
        rows, models = [], load(name)
        for time, model in models:
            balance = Balance(model)
            row, residual = balance_row(balance, balance.parameters())
            rows.append({"time": time} | row)
            print(
                f"{name} {time}: {len(balance.names)} variables, {len(model.equations)} equations "
                f"({balance.dependent_equations} dependent), {len(model.plant['tags'])} tags, "
                f"{len(model.measurements) - len(model.plant['tags'])} soft givens, sum of squares "
                f"{row['sum_of_squares']:.6f}, {row['degrees_of_freedom']} degrees of freedom, null directions "
                f"{balance.null_directions}, {balance.iterations} iterations, residual {residual:.1e}, gaps "
                f"{balance.singular_gap[0]:.0e}/{balance.singular_gap[1]:.0e} "
                f"{balance.information_gap[0]:.0e}/{balance.information_gap[1]:.0e}"
            )
        print("  unobservable:", ", ".join(rows[0]["unobservable"]) or "-")
        how = (
            f"made by tests/oracle/reconcile.py: CasADi {casadi.__version__} with IPOPT (exact Hessian), Newton steps to "
            "a Karush-Kuhn-Tucker residual below 1e-9, dense singular value decomposition; IF97 coefficients out of the "
            f"package iapws {iapws.__version__}. SI units. The enthalpy of a declared liquid is zero at 0 degC and "
            "1.01325 bar."
        )
        store(PLANTS / "expected" / f"{name}.json", how, rows)


def store(path, how, rows):
    """One quantity a line."""
    parts = []
    for row in rows:
        values = ",\n".join(f"    {json.dumps(name)}: {json.dumps(entry)}" for name, entry in row["values"].items())
        head = {key: row[key] for key in ("time", "sum_of_squares", "degrees_of_freedom", "unobservable")}
        parts.append(f'  {json.dumps(head)[:-1]}, "values": {{\n{values}\n  }}}}')
    path.parent.mkdir(exist_ok=True)
    path.write_text(f'{{\n"how": {json.dumps(how)},\n"rows": [\n' + ",\n".join(parts) + "\n]\n}\n")
    json.loads(path.read_text())


if __name__ == "__main__":
    main()
