//! What thermodynamics and calculus demand of water in every region, over thousands of seeded states.

use crate::common::{Random, states};
use meterwright_thermo::water::{
    Properties, Region, State, WaterError, enthalpy_ps, entropy_ph, saturation, temperature_ph,
    temperature_ps, volume_ph,
};

#[track_caller]
fn close(value: f64, expected: f64, tolerance: f64, scale: f64) {
    assert!((value - expected).abs() <= tolerance * scale, "{value} {expected}");
}

/// (dh/dp)_T = v - T (dv/dT)_p, (ds/dp)_T = -(dv/dT)_p and cp = T (ds/dT)_p.
#[test]
fn volume_enthalpy_and_entropy_come_from_one_potential() -> Result<(), WaterError> {
    for (region, pressure, temperature) in states(11, 20_000) {
        let Properties { volume, enthalpy, entropy } = region.properties(pressure, temperature)?;
        let throttling = volume.value - temperature * volume.by_temperature;
        let scale = volume.value + (temperature * volume.by_temperature).abs();
        close(enthalpy.by_pressure, throttling, 1e-9, scale);
        close(entropy.by_pressure, -volume.by_temperature, 1e-9, scale / temperature);
        let heat_capacity = enthalpy.by_temperature;
        close(temperature * entropy.by_temperature, heat_capacity, 1e-9, heat_capacity);
        assert!(volume.by_pressure < 0.0 && heat_capacity > 0.0);
    }
    Ok(())
}

#[test]
fn derivatives_by_pressure_and_temperature_agree_with_central_differences() -> Result<(), WaterError> {
    for (region, pressure, temperature) in states(12, 5000) {
        let here = region.properties(pressure, temperature)?;
        // Near the critical point derivatives change within any step.
        if here.enthalpy.by_temperature > 30e3 {
            continue;
        }
        let (dp, dt) = (pressure * 1e-4, temperature * 1e-5);
        let (up, down) =
            (region.properties(pressure + dp, temperature)?, region.properties(pressure - dp, temperature)?);
        let (warm, cold) =
            (region.properties(pressure, temperature + dt)?, region.properties(pressure, temperature - dt)?);
        let pick: [fn(&Properties) -> meterwright_thermo::Partial; 3] =
            [|all| all.volume, |all| all.enthalpy, |all| all.entropy];
        for (of, unit) in pick.into_iter().zip([here.volume.value, 1e5, 1e2]) {
            let by_pressure = (of(&up).value - of(&down).value) / (2.0 * dp);
            let by_temperature = (of(&warm).value - of(&cold).value) / (2.0 * dt);
            close(of(&here).by_pressure, by_pressure, 1e-5, by_pressure.abs() + 1e-3 * unit / pressure);
            close(
                of(&here).by_temperature,
                by_temperature,
                1e-5,
                by_temperature.abs() + 1e-3 * unit / temperature,
            );
        }
    }
    Ok(())
}

/// Where two regions meet, IAPWS-IF97 itself has small steps, so that one state in the seam has two descriptions.
fn is_near_a_border(region: Region, pressure: f64, temperature: f64) -> bool {
    let differs = |dt: f64| Region::at(pressure, temperature + dt).is_ok_and(|other| other != region);
    differs(0.2) || differs(-0.2)
}

#[test]
fn inverses_return_to_the_state_within_1e9() -> Result<(), WaterError> {
    for (region, pressure, temperature) in states(13, 20_000) {
        if is_near_a_border(region, pressure, temperature) {
            continue;
        }
        let properties = region.properties(pressure, temperature)?;
        let (volume, enthalpy, entropy) =
            (properties.volume.value, properties.enthalpy.value, properties.entropy.value);
        close(temperature_ph(pressure, enthalpy)?.value, temperature, 1e-11, temperature);
        close(temperature_ps(pressure, entropy)?.value, temperature, 1e-11, temperature);
        close(volume_ph(pressure, enthalpy)?.value, volume, 1e-10, volume);
        close(entropy_ph(pressure, enthalpy)?.value, entropy, 1e-11, 1e3);
        close(enthalpy_ps(pressure, entropy)?.value, enthalpy, 1e-11, 1e6);
        assert_eq!(State::from_pressure_enthalpy(pressure, enthalpy)?.region, Some(region));
        assert_eq!(State::from_pressure_entropy(pressure, entropy)?.region, Some(region));
    }
    Ok(())
}

#[test]
fn wet_steam_returns_to_its_quality() -> Result<(), WaterError> {
    let mut random = Random::new(18);
    for _ in 0..5000 {
        let (pressure, quality) = (random.between_logarithms(612.0, 22e6), random.between(0.0, 1.0));
        let wet = State::from_pressure_quality(pressure, quality)?;
        let temperature = saturation::temperature(pressure)?.0;
        for found in [
            State::from_pressure_enthalpy(pressure, wet.enthalpy)?,
            State::from_pressure_entropy(pressure, wet.entropy)?,
            State::from_temperature_quality(temperature, quality)?,
        ] {
            close(found.quality.unwrap_or(f64::NAN), quality, 1e-9, 1.0);
            close(found.temperature, temperature, 1e-12, temperature);
            close(found.volume, wet.volume, 1e-9, wet.volume);
            close(found.enthalpy, wet.enthalpy, 1e-9, 1e6);
            close(found.entropy, wet.entropy, 1e-9, 1e3);
        }
    }
    Ok(())
}

/// dh = T ds + v dp through the inverses, whose derivatives come from the theorem of implicit functions.
#[test]
fn enthalpy_by_entropy_is_temperature_and_by_pressure_is_volume() -> Result<(), WaterError> {
    for (region, pressure, temperature) in states(14, 10_000) {
        let properties = region.properties(pressure, temperature)?;
        let found = enthalpy_ps(pressure, properties.entropy.value)?;
        if is_near_a_border(region, pressure, temperature) {
            continue;
        }
        close(found.by_entropy, temperature, 1e-9, temperature);
        close(found.by_pressure, properties.volume.value, 1e-9, properties.volume.value);
        let entropy = entropy_ph(pressure, properties.enthalpy.value)?;
        close(entropy.by_enthalpy, 1.0 / temperature, 1e-9, 1.0 / temperature);
        let by_pressure = -properties.volume.value / temperature;
        close(entropy.by_pressure, by_pressure, 1e-9, by_pressure.abs());
    }
    Ok(())
}

/// Central differences of every inverse, in one phase and in two, where the neighbours are in the same region.
#[test]
fn derivatives_of_the_inverses_agree_with_central_differences() -> Result<(), WaterError> {
    let mut random = Random::new(15);
    let mut wet = 0;
    for k in 0..6000 {
        let pressure = random.between_logarithms(700.0, 60e6);
        let (second, dp) = (random.between(50e3, 4000e3), pressure * 1e-5);
        let isenthalpic = k % 2 == 0;
        let (second, ds) = if isenthalpic { (second, 10.0) } else { (second / 420.0, 0.02) };
        let at = |pressure, second| {
            if isenthalpic {
                State::from_pressure_enthalpy(pressure, second)
            } else {
                State::from_pressure_entropy(pressure, second)
            }
        };
        let Ok(here) = at(pressure, second) else { continue };
        let (up, down) = (at(pressure + dp, second)?, at(pressure - dp, second)?);
        let (more, less) = (at(pressure, second + ds)?, at(pressure, second - ds)?);
        let alike =
            |other: &State| other.region == here.region && other.quality.is_some() == here.quality.is_some();
        let near_critical =
            (pressure / 22.064e6 - 1.0).abs() < 0.1 && (here.temperature / 647.096 - 1.0).abs() < 0.03;
        if near_critical || ![up, down, more, less].iter().all(alike) {
            continue;
        }
        wet += usize::from(here.quality.is_some());
        let pick: [fn(&State) -> f64; 4] =
            [|state| state.temperature, |state| state.volume, |state| state.enthalpy, |state| state.entropy];
        let slopes = |slope: meterwright_thermo::water::Slope| {
            [slope.temperature, slope.volume, slope.enthalpy, slope.entropy]
        };
        let (by_pressure, by_other) = (slopes(here.by_pressure), slopes(here.by_other));
        for (index, of) in pick.into_iter().enumerate() {
            // Rounding errors of a difference, as a slope.
            let unit = 1e-12 * [1e3, here.volume, 1e6, 1e4][index];
            let numeric = (of(&up) - of(&down)) / (2.0 * dp);
            close(by_pressure[index], numeric, 1.0, 1e-5 * numeric.abs() + unit / dp);
            let numeric = (of(&more) - of(&less)) / (2.0 * ds);
            close(by_other[index], numeric, 1.0, 1e-5 * numeric.abs() + unit / ds);
        }
    }
    assert!(wet > 1000);
    Ok(())
}

#[test]
fn derivatives_along_saturation_agree_with_central_differences() -> Result<(), WaterError> {
    let mut random = Random::new(16);
    for _ in 0..2000 {
        let pressure = random.between_logarithms(700.0, 21.5e6);
        if (pressure / 16.5291643e6 - 1.0).abs() < 1e-3 {
            continue;
        }
        let dp = pressure * 1e-5;
        let (temperature, slope) = saturation::temperature(pressure)?;
        let (back, inverse_slope) = saturation::pressure(temperature)?;
        close(back, pressure, 1e-11, pressure);
        close(slope * inverse_slope, 1.0, 1e-9, 1.0);
        for saturated in [saturation::liquid, saturation::vapour] {
            let (here, up, down) =
                (saturated(pressure)?, saturated(pressure + dp)?, saturated(pressure - dp)?);
            for (here, up, down, unit) in [
                (here.temperature, up.temperature, down.temperature, 1e3),
                (here.volume, up.volume, down.volume, here.volume.value),
                (here.enthalpy, up.enthalpy, down.enthalpy, 1e6),
                (here.entropy, up.entropy, down.entropy, 1e4),
            ] {
                let numeric = (up.value - down.value) / (2.0 * dp);
                close(here.by_pressure, numeric, 1.0, 1e-5 * numeric.abs() + 1e-13 * unit / dp);
            }
        }
    }
    Ok(())
}

/// Clausius and Clapeyron: dp/dT = (s'' - s') / (v'' - v'), to the consistency of the equations of IAPWS-IF97.
#[test]
fn the_saturation_line_is_where_phases_are_in_equilibrium() -> Result<(), WaterError> {
    let mut random = Random::new(17);
    for _ in 0..2000 {
        let pressure = random.between_logarithms(700.0, 21e6);
        let (liquid, vapour) = saturation::both(pressure)?;
        let slope =
            (vapour.entropy.value - liquid.entropy.value) / (vapour.volume.value - liquid.volume.value);
        close(slope * liquid.temperature.by_pressure, 1.0, 2e-3, 1.0);
        let heat = vapour.enthalpy.value - liquid.enthalpy.value;
        let latent = liquid.temperature.value * (vapour.entropy.value - liquid.entropy.value);
        close(latent, heat, 2e-4, heat);
    }
    Ok(())
}
