"""Amounts as the plant files write them, into SI: only the units that the files here use."""

import re

_STANDARD_GRAVITY = 9.80665
# unit: (factor, offset), SI = number * factor + offset
_UNITS = {
    "t/h": (1000 / 3600, 0),
    "kg/s": (1, 0),
    "kg/h": (1 / 3600, 0),
    "bar": (1e5, 0),
    "mbar": (100, 0),
    "kPa": (1e3, 0),
    "MPa": (1e6, 0),
    "Pa": (1, 0),
    "degC": (1, 273.15),
    "K": (1, 0),
    "W": (1, 0),
    "kW": (1e3, 0),
    "MW": (1e6, 0),
    "kJ/kg": (1e3, 0),
    "kJ/(kg.K)": (1e3, 0),
    "J/(kg.K)": (1, 0),
    "kJ/kWh": (1 / 3600, 0),
    "%": (0.01, 0),
    "pp": (0.01, 0),
    "kg/m3": (1, 0),
    "m": (1, 0),
    "m2": (1, 0),
    "m/s": (1, 0),
}


def split(text):
    """'1.2 t/h' as (1.2, 't/h')."""
    number, unit = re.fullmatch(r"\s*([-+0-9.eE]+)\s*(.*?)\s*", text).groups()
    return float(number), unit


def amount(text):
    """An amount with its unit, in SI."""
    number, unit = split(text)
    return to_si(number, unit)


def difference(text):
    """An amount that is a difference (a standard deviation), in SI."""
    number, unit = split(text)
    return number * factor(unit)


def reference(unit):
    """How a reading in this unit rests on the surroundings: +1 gauge, -1 vacuum, 0 absolute; and the plain unit."""
    if unit.endswith(" vac"):
        return -1, unit.removesuffix(" vac")
    if unit.endswith("g") and unit[:-1] in _UNITS and unit[:-1] not in ("k",):
        return 1, unit[:-1]
    return 0, unit


def factor(unit):
    """SI per unit, for differences."""
    return _UNITS[reference(unit)[1]][0]


def to_si(number, unit):
    """A number in a unit that does not rest on the surroundings, in SI."""
    sign, plain = reference(unit)
    assert sign == 0, unit
    scale, offset = _UNITS[plain]
    return number * scale + offset
