"""The equations of a plant, written from its plant file for a general-purpose optimiser.

This is a second writing of the problem, made apart from the program it is to check: every stream has mass flow,
pressure, temperature and enthalpy as variables, every piece of equipment adds its balances, and what the plant file
calls a quantity is a CasADi expression of them. Only the equipment kinds and keys that the plants of this folder use
are known here. What the plant file format leaves open is decided as follows.

* Liquids: h = c (T - 273.15 K) + (p - 101325 Pa) / density, s = c ln(T / 273.15 K).
* Splitter: outlets have the inlet's pressure and share one enthalpy; mass and energy balance tie them to the inlet.
* Header: outlets share one pressure and one enthalpy; inlet pressures are free.
* Turbine section efficiency: (h_start - h_end) / (h_start - h(p_end, s_start)), a section starting where the one before
  ends.
* Pump efficiency: (h(p_out, s_in) - h_in) / (h_out - h_in).
* Exchangers: duty is what the cold side takes; the hot side gives duty + heat_loss; terminal difference is
  T_sat(hot inlet pressure) - T(cold outlet), drain approach T(hot outlet) - T(cold inlet), the logarithmic mean
  difference that of counterflow, ua = duty / logarithmic mean difference.
* Boiler: duty = outlets - inlets of both circuits, blowdown saturated at the drum pressure; steam and reheat
  have a mass balance each.
* Generator: electric_power = efficiency * power; motor: power = efficiency * electric_power; on a shaft what
  turbines and motors make is what the others take plus `loss` plus (1 - efficiency) of what is made for each gearbox.
"""

import math
import re
import tomllib

import casadi as ca

import if97
import units

_TWO_SIDED_95 = 1.959964
_GRAVITY = 9.80665
_LIQUID_ZERO = (101325.0, 273.15)
_DEFAULT_EFFICIENCY = 1.0
_MADE = {"turbine": 1, "motor": 1, "pump": -1, "generator": -1}
_SCALES = {"mass_flow": 100.0, "temperature": 100.0, "enthalpy": 1e6, "power": 1e7, "ratio": 1.0}


class Variable:
    """One unknown: name, scale, start (SI) and its scaled symbol."""

    def __init__(self, name, scale, start):
        self.name, self.scale, self.start = name, scale, start
        self.symbol = ca.SX.sym(name)

    @property
    def value(self):
        return self.symbol * self.scale


class Measurement:
    """A tag or a soft given: what it reads as an expression, its reading and its standard deviation, SI."""

    def __init__(self, name, quantity, expression, reading, sigma):
        self.name, self.quantity, self.expression, self.reading, self.sigma = name, quantity, expression, reading, sigma


class Water:
    """Water and steam; `phase` says which equation a stream holds."""

    def __init__(self, phase):
        self.phase = phase

    def row(self, p, t, h):
        if self.phase == "mixture":
            return t - if97.saturation_temperature(p), 100.0
        return h - self._region(p, t)[0], 1e6

    def _region(self, p, t):
        return if97.region_1(p, t) if self.phase == "liquid" else if97.region_2(p, t)

    def entropy(self, p, t, h):
        if self.phase != "mixture":
            return self._region(p, t)[1]
        _, liquid, vapour = if97.saturated(p)
        return liquid[1] + (h - liquid[0]) / (vapour[0] - liquid[0]) * (vapour[1] - liquid[1])

    def density(self, p, t, h):
        if self.phase != "mixture":
            return self._region(p, t)[2]
        _, liquid, vapour = if97.saturated(p)
        x = (h - liquid[0]) / (vapour[0] - liquid[0])
        return 1 / (1 / liquid[2] + x * (1 / vapour[2] - 1 / liquid[2]))

    def enthalpy(self, p, t):
        """Enthalpy for a start, from numbers."""
        if self.phase == "mixture":
            _, liquid, vapour = if97.saturated(p)
            return 0.08 * liquid[0] + 0.92 * vapour[0]
        return self._region(p, t)[0]


class Liquid:
    """An incompressible liquid."""

    phase = "liquid"

    def __init__(self, density, specific_heat):
        self.rho, self.c = density, specific_heat

    def enthalpy(self, p, t):
        return self.c * (t - _LIQUID_ZERO[1]) + (p - _LIQUID_ZERO[0]) / self.rho

    def row(self, p, t, h):
        return h - self.enthalpy(p, t), 1e6

    def entropy(self, p, t, h):
        return self.c * ca.log(t / _LIQUID_ZERO[1])

    def density(self, p, t, h):
        return self.rho


class Model:
    """Variables, equations, measurements and quantities of one plant.

    `readings` maps tags to numbers in their unit (None where there is none) or, with `targets`, is left out and
    `targets` maps quantities to (SI value, sigma), with `starts` for the others: so a truth is designed with the same
    equations.
    """

    def __init__(self, path, readings=None, targets=None, starts=None):
        with open(path, "rb") as file:
            self.plant = tomllib.load(file)
        self.variables, self.equations, self.measurements, self.derived, self.exact = {}, [], [], {}, {}
        self.starts = dict(starts or {})
        self.given = self.plant.get("given", {})
        self.used_givens = set()
        self._read_starts(readings, targets)
        self.equipment = self.plant["equipment"]
        self.ports = {name: {} for name in self.equipment}
        for stream, entry in self.plant["streams"].items():
            for end in ("from", "to"):
                if end in entry:
                    machine, port = entry[end].split(".", 1)
                    self.ports[machine][port] = stream
        self.with_energy = {
            stream
            for machine, ports in self.ports.items()
            for stream in ports.values()
            if "energy" in self.equipment[machine].get("closes", ["mass", "energy"])
        }
        self._surroundings()
        self._guess()
        for stream in self.plant["streams"]:
            self._stream(stream)
        for machine, entry in self.equipment.items():
            getattr(self, "_" + entry["kind"])(machine, self.ports[machine])
        for shaft, entry in self.plant.get("shafts", {}).items():
            self._shaft(shaft, entry["members"])
        for name, entry in self.plant.get("indicators", {}).items():
            self.derived[name] = self._formula(entry["formula"])
        self._givens()
        if targets is None:
            self._tags(readings)
        else:
            for quantity, (value, sigma) in targets.items():
                self._measure(quantity, quantity, self.quantity(quantity), value, sigma)

    # ------------------------------------------------------------------------------------------------ building blocks

    def variable(self, name, scale, start):
        if name not in self.variables:
            self.variables[name] = Variable(name, scale, self.starts.get(name, start))
        return self.variables[name].value

    def equation(self, name, expression, scale):
        self.equations.append((name, expression / scale))

    def quantity(self, name):
        if name in self.variables:
            return self.variables[name].value
        if name in self.derived:
            return self.derived[name]
        stream, _, what = name.partition(".")
        if stream in self.plant["streams"] and what in ("entropy", "density", "quality", "volume_flow"):
            self.derived[name] = self._stream_quantity(stream, what)
            return self.derived[name]
        raise KeyError(name)

    def parameter(self, name, default, kind):
        """A quantity with a default: the default exactly, unless given otherwise."""
        given = self.given.get(name)
        if given is None:
            return default
        self.used_givens.add(name)
        if isinstance(given, str) and given != "unknown":
            return units.amount(given)
        start = units.amount(given["value"]) if isinstance(given, dict) else default
        value = self.variable(name, _SCALES[kind], start)
        if isinstance(given, dict):
            self._measure(name, name, value, start, self._given_sigma(given))
        return value

    def _given_sigma(self, given):
        number, unit = units.split(given["sigma"])
        return abs(number / 100 * units.amount(given["value"])) if unit == "%" else number * units.factor(unit)

    def _measure(self, name, quantity, expression, reading, sigma):
        self.measurements.append(Measurement(name, quantity, expression, reading, sigma))

    def _formula(self, text):
        names = sorted(set(re.findall(r"[A-Za-z_][\w]*(?:\.[\w]+)+", text)), key=len, reverse=True)
        scope = {f"q{i}": self.quantity(name) for i, name in enumerate(names)}
        for i, name in enumerate(names):
            text = text.replace(name, f"q{i}")
        return eval(text, {"__builtins__": {}}, scope)

    # --------------------------------------------------------------------------------------------------------- starts

    def _read_starts(self, readings, targets):
        """Measured or designed values start the solve; a tag's typical value where it has no reading."""
        self.ambient = units.amount(self.plant["plant"].get("surroundings", {}).get("pressure", "1.01325 bar"))
        for tag, entry in self.plant.get("tags", {}).items():
            number = (readings or {}).get(tag)
            if number is None and targets is None:
                number = entry.get("typical")
            if number is not None:
                sign, plain = units.reference(entry["unit"])
                value = units.to_si(number, plain)
                self.starts.setdefault(entry["reads"], self.ambient + sign * value if sign else value)
        for quantity, (value, _) in (targets or {}).items():
            self.starts[quantity] = value
        for quantity, given in self.given.items():
            if given != "unknown":
                self.starts.setdefault(quantity, units.amount(given["value"] if isinstance(given, dict) else given))

    def _guess(self):
        """Spreads known flows, pressures and temperatures over the streams that lack them."""
        import numpy as np

        names = list(self.plant["streams"])
        index = {name: i for i, name in enumerate(names)}

        def spread(quantity, forward, backward, rows, default):
            matrix, right = [], []

            def add(coefficients, value, weight):
                row = np.zeros(len(names))
                for name, coefficient in coefficients.items():
                    row[index[name]] += coefficient * weight
                matrix.append(row)
                right.append(value * weight)

            known = [
                forward(self.starts[f"{name}.{quantity}"]) for name in names if f"{name}.{quantity}" in self.starts
            ]
            centre = float(np.median(known)) if known else default
            for name in names:
                if f"{name}.{quantity}" in self.starts:
                    add({name: 1}, forward(self.starts[f"{name}.{quantity}"]), 100.0)
                add({name: 1}, centre, 1e-3)
            for coefficients, weight in rows:
                add(coefficients, 0.0, weight)
            solution = np.linalg.lstsq(np.array(matrix), np.array(right), rcond=None)[0]
            for name in names:
                self.starts.setdefault(f"{name}.{quantity}", backward(float(solution[index[name]])))

        sides = {"heat_exchanger": True, "condenser": True, "feedwater_heater": True}
        mass, pressure, temperature = [], [], []
        for machine, ports in self.ports.items():
            kind = self.equipment[machine]["kind"]
            groups = {}
            for port, stream in ports.items():
                side = "cold" if kind in sides and port.startswith("cold") else "hot"
                if kind == "boiler" and port.startswith("reheat"):
                    side = "cold"
                groups.setdefault(side, []).append((port, stream))
            for members in groups.values():
                mass.append(({stream: (1 if self._enters(port) else -1) for port, stream in members}, 30.0))
                weight = 0.0 if kind in ("pump", "turbine", "boiler", "valve", "desuperheater", "drum") else 1.0
                first = members[0][1]
                for port, stream in members[1:]:
                    minor = port.startswith(("drain_inlet", "spray")) or kind in ("deaerator",)
                    pressure.append(({first: 1, stream: -1}, 0.01 if minor else weight))
                    heated = kind in sides or kind in ("turbine", "boiler", "heat_user", "deaerator") or minor
                    temperature.append(({first: 1, stream: -1}, 0.01 if heated else 1.0))
            for port in ("water", "blowdown"):
                if port in ports:
                    pressure.append(({ports["steam"]: 1, ports[port]: -1}, 1.0))
        spread("mass_flow", lambda v: v, lambda v: max(v, 0.1), mass, 10.0)
        spread("pressure", math.log, math.exp, pressure, math.log(3e5))
        spread("temperature", lambda v: v, lambda v: v, temperature, 350.0)

    @staticmethod
    def _enters(port):
        return "inlet" in port or port.split(".")[0] in ("feedwater", "spray", "reheat_spray", "admission")

    # -------------------------------------------------------------------------------------------------------- streams

    def _surroundings(self):
        name = "surroundings.pressure"
        read = any(entry["reads"] == name for entry in self.plant.get("tags", {}).values())
        if read or isinstance(self.given.get(name), dict):
            self.variable(name, 1e5, self.ambient)
        else:
            self.derived[name] = ca.SX(self.ambient)

    def _fluid(self, stream):
        entry = self.plant["streams"][stream]
        declared = self.plant.get("fluids", {}).get(entry["fluid"])
        if declared is None:
            return Water(self._phase(stream, entry))
        assert declared["kind"] == "liquid"
        return Liquid(units.amount(declared["density"]), units.amount(declared["specific_heat"]))

    def _phase(self, stream, entry):
        """The stated phase, else that of the start."""
        if "phase" in entry:
            return entry["phase"]
        saturation = float(if97.saturation_temperature(ca.DM(self.starts[f"{stream}.pressure"])))
        return "liquid" if self.starts[f"{stream}.temperature"] <= saturation else "vapour"

    def _stream(self, stream):
        self.variable(f"{stream}.mass_flow", _SCALES["mass_flow"], 10.0)
        if stream not in self.with_energy:
            return
        fluid = self._fluid(stream)
        pressure, temperature = self.starts[f"{stream}.pressure"], self.starts[f"{stream}.temperature"]
        if fluid.phase == "mixture":
            temperature = self.starts[f"{stream}.temperature"] = float(if97.saturation_temperature(ca.DM(pressure)))
        if isinstance(fluid, Water) and fluid.phase != "mixture":
            saturation = float(if97.saturation_temperature(ca.DM(min(pressure, 16.5e6))))
            if fluid.phase == "liquid":
                temperature = min(temperature, saturation)
            elif pressure < 16.5e6:
                temperature = max(temperature, saturation)
            self.starts[f"{stream}.temperature"] = temperature
        p = self.variable(f"{stream}.pressure", 10 ** round(math.log10(pressure)), pressure)
        t = self.variable(f"{stream}.temperature", _SCALES["temperature"], temperature)
        start = float(fluid.enthalpy(ca.DM(pressure), ca.DM(temperature)))
        h = self.variable(f"{stream}.enthalpy", _SCALES["enthalpy"], start)
        row, scale = fluid.row(p, t, h)
        self.equation(f"{stream}: property", row, scale)
        if fluid.phase == "mixture":
            self.quantity(f"{stream}.quality")

    def state(self, stream):
        return (
            self.quantity(f"{stream}.pressure"),
            self.quantity(f"{stream}.temperature"),
            self.quantity(f"{stream}.enthalpy"),
        )

    def _stream_quantity(self, stream, what):
        p, t, h = self.state(stream)
        if what == "quality":
            _, liquid, vapour = if97.saturated(p)
            return (h - liquid[0]) / (vapour[0] - liquid[0])
        fluid = self._fluid(stream)
        if what == "entropy":
            return fluid.entropy(p, t, h)
        density = fluid.density(p, t, h)
        return density if what == "density" else self.quantity(f"{stream}.mass_flow") / density

    def pressure(self, stream):
        return self.quantity(f"{stream}.pressure")

    def temperature(self, stream):
        return self.quantity(f"{stream}.temperature")

    def enthalpy(self, stream):
        return self.quantity(f"{stream}.enthalpy")

    def mass_flow(self, stream):
        return self.quantity(f"{stream}.mass_flow")

    def energy(self, streams):
        """What the streams carry, W: enthalpy, and potential and kinetic energy where the file states their keys."""
        total = 0
        for stream in streams:
            entry = self.plant["streams"][stream]
            specific = self.enthalpy(stream)
            if "elevation" in entry:
                specific += _GRAVITY * units.amount(entry["elevation"])
            if "area" in entry:
                velocity = self.quantity(f"{stream}.volume_flow") / units.amount(entry["area"])
                specific += velocity**2 / 2
            total += self.mass_flow(stream) * specific
        return total

    # ------------------------------------------------------------------------------------------------------- balances

    def _closes(self, machine, what):
        return what in self.equipment[machine].get("closes", ["mass", "energy"])

    def mass_balance(self, machine, inlets, outlets, side=""):
        if self._closes(machine, "mass"):
            total = sum(map(self.mass_flow, inlets)) - sum(map(self.mass_flow, outlets))
            self.equation(f"{machine}: {side}mass", total, _SCALES["mass_flow"])

    def energy_balance(self, machine, inlets, outlets, leaving=0, side=""):
        if self._closes(machine, "energy"):
            total = self.energy(inlets) - self.energy(outlets) - leaving
            carried = [
                self._start(stream, "mass_flow") * self._start(stream, "enthalpy") for stream in inlets + outlets
            ]
            largest = max(map(abs, carried))
            self.equation(f"{machine}: {side}energy", total, max(largest, 1e4))

    def heat_loss(self, machine):
        name = f"{machine}.heat_loss"
        value = self.parameter(name, 0.0, "power")
        if name not in self.variables:
            self.derived[name] = ca.SX(value)
        return value

    @staticmethod
    def many(ports, name):
        return [stream for port, stream in ports.items() if port == name or port.startswith(name + ".")]

    def _sides(self, machine, ports):
        """Inlets and outlets of equipment whose ports are called inlet and outlet."""
        inlets = [stream for port, stream in ports.items() if self._enters(port)]
        outlets = [stream for port, stream in ports.items() if not self._enters(port)]
        self.mass_balance(machine, inlets, outlets)
        return inlets, outlets

    def _same(self, machine, what, first, second, scale):
        self.equation(f"{machine}: equal {what}", first - second, scale)

    def _pressure_drop(self, machine, inlet, outlet, name="pressure_drop"):
        self.derived[f"{machine}.{name}"] = self.pressure(inlet) - self.pressure(outlet)

    def _isentropic(self, name, start, end):
        """Enthalpy at the end's pressure and the start's entropy; the phase there is that of the start of the solve."""
        p, t, h = self.state(start)
        fluid, pressure = self._fluid(start), self.pressure(end)
        entropy = fluid.entropy(p, t, h)
        if isinstance(fluid, Liquid):
            return fluid.enthalpy(pressure, t)
        if fluid.phase == "vapour":
            number = self._number(entropy)
            saturation, liquid, vapour = if97.saturated(pressure)
            if number < self._number(vapour[1]):
                x = (entropy - liquid[1]) / (vapour[1] - liquid[1])
                return liquid[0] + x * (vapour[0] - liquid[0])
        temperature = self.variable(
            f"{name}.isentropic_temperature", _SCALES["temperature"], self.starts[f"{end}.temperature"]
        )
        region = if97.region_1 if fluid.phase == "liquid" else if97.region_2
        enthalpy, reached, _ = region(pressure, temperature)
        self.equation(f"{name}: isentropic", reached - entropy, 1e3)
        return enthalpy

    def _number(self, expression):
        """An expression at the start."""
        symbols = [variable.symbol for variable in self.variables.values()]
        starts = [variable.start / variable.scale for variable in self.variables.values()]
        return float(ca.Function("f", [ca.vertcat(*symbols)], [expression])(starts))

    def _start(self, stream, what):
        return self.variables[f"{stream}.{what}"].start

    # ---------------------------------------------------------------------------------------------------------- kinds

    def _mixer(self, machine, ports):
        inlets, outlets = self._sides(machine, ports)
        self.energy_balance(machine, inlets, outlets, self.heat_loss(machine))

    _desuperheater = _mixer

    def _splitter(self, machine, ports):
        inlets, outlets = self._sides(machine, ports)
        self.energy_balance(machine, inlets, outlets, self.heat_loss(machine))
        for stream in outlets:
            self._same(machine, "pressure", self.pressure(inlets[0]), self.pressure(stream), 1e5)
        self._share(machine, outlets, ["enthalpy"])

    def _header(self, machine, ports):
        inlets, outlets = self._sides(machine, ports)
        if self._closes(machine, "energy"):
            self.energy_balance(machine, inlets, outlets, self.heat_loss(machine))
            self._share(machine, outlets, ["pressure", "enthalpy"])

    def _share(self, machine, streams, quantities):
        for stream in streams[1:]:
            for what in quantities:
                first, second = (self.quantity(f"{name}.{what}") for name in (streams[0], stream))
                self._same(machine, what, first, second, 1e5)

    def _pipe(self, machine, ports):
        self._mixer(machine, ports)
        self._pressure_drop(machine, ports["inlet"], ports["outlet"])

    _valve = _pipe

    def _turbine(self, machine, ports):
        inlets, outlets = self._sides(machine, ports)
        power = self.variable(f"{machine}.power", _SCALES["power"], 5e7)
        self.energy_balance(machine, inlets, outlets, power + self.heat_loss(machine))
        order = self.equipment[machine].get("sections", [])
        ends = [(f"{name}", ports[f"extraction.{name}"]) for name in order] + [("outlet", ports["outlet"])]
        start = ports["inlet"]
        for port, end in ends:
            name = f"{machine}.efficiency" + (f".{port}" if order else "")
            drop = self.enthalpy(start) - self._isentropic(name, start, end)
            self.derived[name] = (self.enthalpy(start) - self.enthalpy(end)) / drop
            start = end

    def _pump(self, machine, ports):
        inlets, outlets = self._sides(machine, ports)
        power = self.variable(f"{machine}.power", _SCALES["power"], 1e6)
        self.energy_balance(machine, inlets, outlets, self.heat_loss(machine) - power)
        start, end = ports["inlet"], ports["outlet"]
        ideal = self._isentropic(f"{machine}.efficiency", start, end)
        self.derived[f"{machine}.efficiency"] = (ideal - self.enthalpy(start)) / (
            self.enthalpy(end) - self.enthalpy(start)
        )
        self.derived[f"{machine}.pressure_rise"] = self.pressure(end) - self.pressure(start)
        self.derived[f"{machine}.pressure_ratio"] = self.pressure(end) / self.pressure(start)

    def _exchanger(self, machine, ports):
        hot = [ports["hot_inlet"]] + self.many(ports, "drain_inlet")
        duty = self.variable(f"{machine}.duty", _SCALES["power"], 1e7)
        self.mass_balance(machine, hot, [ports["hot_outlet"]], "hot ")
        self.mass_balance(machine, [ports["cold_inlet"]], [ports["cold_outlet"]], "cold ")
        self.energy_balance(machine, hot, [ports["hot_outlet"]], duty + self.heat_loss(machine), "hot ")
        self.energy_balance(machine, [ports["cold_inlet"]], [ports["cold_outlet"]], -duty, "cold ")
        for side in ("hot", "cold"):
            self._pressure_drop(machine, ports[f"{side}_inlet"], ports[f"{side}_outlet"], f"{side}_pressure_drop")

    def _heat_exchanger(self, machine, ports):
        self._exchanger(machine, ports)
        entry = self.temperature(ports["hot_inlet"]) - self.temperature(ports["cold_outlet"])
        exit = self.temperature(ports["hot_outlet"]) - self.temperature(ports["cold_inlet"])
        mean = (entry - exit) / ca.log(entry / exit)
        self.derived[f"{machine}.log_mean_difference"] = mean
        self.derived[f"{machine}.ua"] = self.quantity(f"{machine}.duty") / mean

    def _condenser(self, machine, ports):
        self._exchanger(machine, ports)
        saturation = if97.saturation_temperature(self.pressure(ports["hot_inlet"]))
        self.derived[f"{machine}.terminal_difference"] = saturation - self.temperature(ports["cold_outlet"])

    def _feedwater_heater(self, machine, ports):
        self._condenser(machine, ports)
        approach = self.temperature(ports["hot_outlet"]) - self.temperature(ports["cold_inlet"])
        self.derived[f"{machine}.drain_approach"] = approach

    def _saturated(self, machine, stream, pressure):
        saturation = if97.saturation_temperature(pressure)
        self.equation(f"{machine}: {stream} saturated", self.temperature(stream) - saturation, 100.0)

    def _deaerator(self, machine, ports):
        self._mixer(machine, ports)
        self._saturated(machine, ports["outlet"], self.pressure(ports["outlet"]))

    def _drum(self, machine, ports):
        inlets = self.many(ports, "inlet")
        outlets = [ports[name] for name in ("steam", "water", "blowdown") if name in ports]
        self.mass_balance(machine, inlets, outlets)
        self.energy_balance(machine, inlets, outlets, self.heat_loss(machine))
        for stream in outlets:
            self._saturated(machine, stream, self.pressure(stream))
            if stream != outlets[0]:
                self._same(machine, "pressure", self.pressure(outlets[0]), self.pressure(stream), 1e5)

    def _boiler(self, machine, ports):
        steam_in = [ports["feedwater"]] + self.many(ports, "spray")
        steam_out = [ports[name] for name in ("steam", "blowdown") if name in ports]
        self.mass_balance(machine, steam_in, steam_out, "steam ")
        reheat_in = self.many(ports, "reheat_inlet") + self.many(ports, "reheat_spray")
        reheat_out = self.many(ports, "reheat_outlet")
        self.mass_balance(machine, reheat_in, reheat_out, "reheat ")
        duty = self.variable(f"{machine}.duty", _SCALES["power"] * 10, 4e8)
        self.energy_balance(machine, steam_in + reheat_in, steam_out + reheat_out, -duty)
        if "blowdown" in ports:
            start = self.starts[f"{ports['steam']}.pressure"] * 1.05
            drum = self.variable(f"{machine}.drum_pressure", 1e7, start)
            self._same(machine, "drum pressure", self.pressure(ports["blowdown"]), drum, 1e7)
            self._saturated(machine, ports["blowdown"], drum)
            self.derived[f"{machine}.drum_pressure_drop"] = drum - self.pressure(ports["steam"])

    def _heat_user(self, machine, ports):
        inlets, outlets = self._sides(machine, ports)
        duty = self.variable(f"{machine}.duty", _SCALES["power"], 1e6)
        self.energy_balance(machine, inlets, outlets, duty + self.heat_loss(machine))

    def _efficiency(self, machine):
        name = f"{machine}.efficiency"
        value = self.parameter(name, _DEFAULT_EFFICIENCY, "ratio")
        if name not in self.variables:
            self.derived[name] = ca.SX(value)
        return value

    def _generator(self, machine, ports):
        electric = self.variable(f"{machine}.electric_power", _SCALES["power"], 1e8)
        power = self.variable(f"{machine}.power", _SCALES["power"], 1e8)
        self.equation(f"{machine}: efficiency", electric - self._efficiency(machine) * power, 1e7)

    def _motor(self, machine, ports):
        electric = self.variable(f"{machine}.electric_power", _SCALES["power"], 1e6)
        power = self.variable(f"{machine}.power", _SCALES["power"], 1e6)
        self.equation(f"{machine}: efficiency", power - self._efficiency(machine) * electric, 1e7)

    def _gearbox(self, machine, ports):
        self._efficiency(machine)

    def _shaft(self, shaft, members):
        kinds = {member: self.equipment[member]["kind"] for member in members}
        made = sum(self.quantity(f"{name}.power") for name, kind in kinds.items() if _MADE.get(kind) == 1)
        taken = sum(self.quantity(f"{name}.power") for name, kind in kinds.items() if _MADE.get(kind) == -1)
        lost = self.parameter(f"{shaft}.loss", 0.0, "power")
        for name, kind in kinds.items():
            if kind == "gearbox":
                lost = lost + (1 - self.quantity(f"{name}.efficiency")) * made
        self.equation(f"{shaft}: shaft", made - taken - lost, 1e7)

    # ------------------------------------------------------------------------------------------------ what is known

    def _givens(self):
        for name, given in self.given.items():
            if name in self.used_givens or given == "unknown":
                continue
            if isinstance(given, dict):
                value = units.amount(given["value"])
                self._measure(name, name, self.quantity(name), value, self._given_sigma(given))
            else:
                value = units.amount(given)
                self.exact[name] = value
                self.equation(f"{name}: given", self.quantity(name) - value, max(abs(value), 1e4))

    def _tags(self, readings):
        for tag, entry in self.plant["tags"].items():
            number = readings.get(tag)
            if number is None:
                continue
            expression = self.quantity(entry["reads"])
            sign, plain = units.reference(entry["unit"])
            if sign:
                expression = sign * (expression - self.quantity("surroundings.pressure"))
            self._measure(tag, entry["reads"], expression, units.to_si(number, plain), tag_sigma(entry, number))


def tag_sigma(entry, reading):
    """Standard deviation of a reading (in the tag's unit), SI."""
    unit = entry["unit"]
    if "sigma" in entry:
        number, own = units.split(entry["sigma"])
        return abs(number / 100 * reading) * units.factor(unit) if own == "%" else number * units.factor(own)
    squares = 0.0
    for part in entry["accuracy"]:
        number, own = units.split(part)
        if own == "%":
            half = abs(number / 100 * reading) * units.factor(unit)
        elif own == "% span":
            half = number / 100 * (entry["span"][1] - entry["span"][0]) * units.factor(unit)
        else:
            half = number * units.factor(own)
        squares += (half / _TWO_SIDED_95) ** 2
    return math.sqrt(squares)
