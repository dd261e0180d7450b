"""What the invented plants are like: targets (SI value, tolerance) for the equations, chosen as a designer would.

The tolerances only decide who gives way; every truth closes exactly.
"""

BAR, T_PER_H, MW = 1e5, 1 / 3.6, 1e6


def _celsius(number):
    return number + 273.15


def _exactly(values):
    return {name: (value, max(abs(value), 1.0) * 1e-2) for name, value in values.items()}


def _reheat_unit():
    pressures = {
        "surroundings": 1.006,
        "main_steam": 142.6,
        "throttle_steam": 138.9,
        "hp_exhaust": 38.2,
        "hot_reheat": 34.6,
        "extraction_5": 16.4,
        "extraction_4": 7.9,
        "extraction_3": 2.75,
        "extraction_2": 0.88,
        "exhaust": 0.0452,
        "heater_6_steam": 36.9,
        "feed_suction": 7.4,
        "feed_discharge": 178.5,
        "feedwater": 175.2,
        "condensate": 14.2,
        "cooling_water_in": 2.35,
        "auxiliary_steam": 9.6,
        "gland_steam": 9.2,
        "auxiliary_reduced": 10.4,
    }
    temperatures = {
        "main_steam": 541.2,
        "hot_reheat": 540.1,
        "hotwell": 29.2,
        "cooling_water_in": 16.3,
        "makeup": 18.0,
        "auxiliary_steam": 235.0,
        "heating_condensate": 86.0,
    }
    flows = {
        "main_steam": 430.0,
        "blowdown": 2.4,
        "main_spray": 9.6,
        "reheat_spray": 2.1,
        "auxiliary_steam": 7.8,
        "gland_steam": 2.2,
        "atomising_steam": 1.9,
    }
    plain = {
        "hp_turbine.efficiency": 0.868,
        "lp_turbine.efficiency.e5": 0.882,
        "lp_turbine.efficiency.e4": 0.884,
        "lp_turbine.efficiency.e3": 0.887,
        "lp_turbine.efficiency.e2": 0.886,
        "lp_turbine.efficiency.outlet": 0.865,
        "generator.efficiency": 0.9862,
        "main.loss": 0.45 * MW,
        "bfp_motor.efficiency": 0.957,
        "boiler_feed_pump.efficiency": 0.80,
        "condensate_pump.efficiency": 0.76,
        "main_steam_pipe.heat_loss": 60e3,
        "hp_turbine.heat_loss": 140e3,
        "boiler.drum_pressure": 152.4 * BAR,
        "condenser.terminal_difference": 4.6,
        "hp_heater_6.terminal_difference": 1.2,
        "hp_heater_5.terminal_difference": 2.4,
        "lp_heater_3.terminal_difference": 2.6,
        "lp_heater_2.terminal_difference": 3.0,
        "hp_heater_6.drain_approach": 6.5,
        "hp_heater_5.drain_approach": 7.2,
        "lp_heater_3.drain_approach": 6.1,
        "lp_heater_2.drain_approach": 6.8,
        "hp_heater_5.cold_pressure_drop": 1.5 * BAR,
        "lp_heater_2.cold_pressure_drop": 0.9 * BAR,
        "lp_heater_3.cold_pressure_drop": 0.75 * BAR,
        "condenser.cold_pressure_drop": 0.42 * BAR,
        "extraction_pipe_4.pressure_drop": 0.38 * BAR,
    }
    values = {f"{name}.pressure": value * BAR for name, value in pressures.items()}
    values |= {f"{name}.temperature": _celsius(value) for name, value in temperatures.items()}
    values |= {f"{name}.mass_flow": value * T_PER_H for name, value in flows.items()}
    return _exactly(values | plain)


def _reheat_start():
    temperatures = {
        "throttle_steam": 540,
        "hp_exhaust": 352,
        "cold_reheat": 352,
        "extraction_6": 352,
        "auxiliary_supply": 352,
        "extraction_5": 437,
        "extraction_4": 338,
        "extraction_3": 216,
        "extraction_2": 112,
        "heater_6_steam": 351,
        "deaerator_steam": 337,
        "condensate": 29.4,
        "condensate_2": 91,
        "condensate_3": 128,
        "feed_suction": 167,
        "feed_discharge": 170,
        "feedwater_4": 170,
        "main_spray": 170,
        "reheat_spray": 170,
        "auxiliary_spray": 170,
        "feedwater_5": 200,
        "feedwater": 244,
        "drain_6": 206,
        "drain_5": 177,
        "drain_3": 97,
        "drain_2": 38,
        "cooling_water_out": 26,
        "auxiliary_reduced": 330,
        "gland_steam": 234,
        "atomising_steam": 234,
        "heating_steam": 234,
        "blowdown": 340,
    }
    flows = {
        "feedwater": 420,
        "extraction_6": 35,
        "extraction_5": 17,
        "extraction_4": 20,
        "extraction_3": 20,
        "extraction_2": 33,
        "exhaust": 300,
        "condensate": 365,
        "cooling_water_in": 16000,
        "drain_6": 35,
        "drain_5": 52,
        "drain_3": 20,
        "drain_2": 53,
        "makeup": 10,
        "cold_reheat": 380,
    }
    start = {f"{name}.temperature": _celsius(value) for name, value in temperatures.items()}
    return start | {f"{name}.mass_flow": value * T_PER_H for name, value in flows.items()}


def _exchanger_train():
    pressures = {
        "stock_feed": 2.2,
        "stock_1": 11.4,
        "stock_3": 8.9,
        "product": 8.0,
        "product_top": 5.6,
        "water_supply": 15.2,
        "water_2": 13.8,
        "water_3": 13.2,
        "flash_steam": 1.14,
    }
    temperatures = {
        "stock_feed": 21.5,
        "stock_2": 58.0,
        "stock_a_hot": 109.0,
        "stock_b_hot": 106.0,
        "product": 148.0,
        "product_top": 147.2,
        "water_supply": 182.0,
        "tracing_condensate": 84.0,
    }
    flows = {"stock_feed": 121.0, "stock_b": 57.5, "water_supply": 112.0, "water_b": 52.0}
    plain = {
        "exchanger_3.heat_loss": 135e3,
        "pump_motor.efficiency": 0.931,
        "stock_pump.efficiency": 0.72,
        "exchanger_1.cold_pressure_drop": 0.65 * BAR,
        "exchanger_2a.cold_pressure_drop": 0.75 * BAR,
        "exchanger_2b.cold_pressure_drop": 0.85 * BAR,
        "exchanger_2a.hot_pressure_drop": 0.45 * BAR,
        "exchanger_2b.hot_pressure_drop": 0.55 * BAR,
        "exchanger_3.hot_pressure_drop": 0.75 * BAR,
        "trim_valve.pressure_drop": 0.28 * BAR,
    }
    values = {f"{name}.pressure": value * BAR for name, value in pressures.items()}
    values |= {f"{name}.temperature": _celsius(value) for name, value in temperatures.items()}
    values |= {f"{name}.mass_flow": value * T_PER_H for name, value in flows.items()}
    return _exactly(values | plain)


def _exchanger_start():
    temperatures = {"water_1": 161, "water_a_cool": 133, "water_b_cool": 134, "water_3": 114, "flash_steam": 103}
    return {f"{name}.temperature": _celsius(value) for name, value in temperatures.items()} | {
        "flash_steam.mass_flow": 2 * T_PER_H,
        "stock_pump.power": 50e3,
    }


def _header_network():
    flows = {
        "boiler_1_steam": 82.0,
        "boiler_2_steam": 95.0,
        "hp_to_turbine": 118.0,
        "hp_letdown": 9.0,
        "turbine_to_mp": 46.0,
        "mp_to_dryer": 21.0,
        "mp_to_still": 17.0,
        "lp_to_evaporators": 54.0,
        "lp_to_ring": 22.5,
        "ring_north": 9.0,
        "ring_to_hall": 8.0,
    }
    return _exactly({f"{name}.mass_flow": value * T_PER_H for name, value in flows.items()})


STARTS = {"reheat_unit": _reheat_start(), "exchanger_train": _exchanger_start(), "header_network": {}}
TARGETS = {
    "reheat_unit": _reheat_unit(),
    "exchanger_train": _exchanger_train(),
    "header_network": _header_network(),
}
SEEDS = {"reheat_unit": 20260210, "exchanger_train": 41, "header_network": 7}
