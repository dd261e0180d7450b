//! Borders between regions, states beyond them, and inputs that are no states at all.

use crate::common::Random;
use meterwright_thermo::water::{
    Phase, Region, State, WaterError, enthalpy_ps, entropy_ph, saturation, temperature_ph, temperature_ps,
    volume_ph,
};

const REGIONS: [Region; 5] =
    [Region::One, Region::Two, Region::ThreeLiquid, Region::ThreeVapour, Region::Five];

/// Everything that can be asked, of any two numbers: an error or finite values.
fn ask_everything(first: f64, second: f64) {
    let finite = |state: Result<State, WaterError>| {
        if let Ok(state) = state {
            let values = [state.temperature, state.volume, state.enthalpy, state.entropy];
            assert!(values.iter().all(|value| value.is_finite()), "{first} {second} {state:?}");
            assert!(state.quality.is_none_or(|quality| (0.0..=1.0).contains(&quality)));
        }
    };
    finite(State::from_pressure_temperature(first, second));
    finite(State::from_pressure_enthalpy(first, second));
    finite(State::from_pressure_entropy(first, second));
    finite(State::from_pressure_quality(first, second));
    finite(State::from_temperature_quality(first, second));
    for region in REGIONS {
        if let Ok(properties) = region.properties(first, second) {
            for partial in [properties.volume, properties.enthalpy, properties.entropy] {
                assert!(partial.value.is_finite(), "{region:?} {first} {second}");
            }
        }
        if let Ok(enthalpy) = region.enthalpy(first, second) {
            assert!(enthalpy.value.is_finite(), "{region:?} {first} {second}");
        }
    }
    for phase in [Phase::Liquid, Phase::Vapour] {
        let _ = Region::of_phase(phase, first, second);
    }
    let values = [
        temperature_ph(first, second).map(|found| found.value),
        entropy_ph(first, second).map(|found| found.value),
        volume_ph(first, second).map(|found| found.value),
        temperature_ps(first, second).map(|found| found.value),
        enthalpy_ps(first, second).map(|found| found.value),
        saturation::pressure(first).map(|found| found.0),
        saturation::temperature(first).map(|found| found.0),
        saturation::liquid(first).map(|found| found.enthalpy.value),
        saturation::vapour(first).map(|found| found.enthalpy.value),
    ];
    for value in values.into_iter().flatten() {
        assert!(value.is_finite(), "{first} {second}");
    }
}

#[test]
fn no_number_is_answered_with_a_panic_an_endless_loop_or_nonsense() {
    let special = [
        f64::NAN,
        f64::INFINITY,
        f64::NEG_INFINITY,
        f64::MAX,
        f64::MIN,
        f64::MIN_POSITIVE,
        5e-324,
        0.0,
        -0.0,
        -1.0,
        1.0,
        611.212677,
        22.064e6,
        16.5291642526045e6,
        100e6,
        273.15,
        623.15,
        647.096,
        863.15,
        1073.15,
        1080.0,
        2273.15,
        2087.5e3,
        4.412e3,
        2.5e6,
        1e-300,
        1e300,
    ];
    for first in special {
        for second in special {
            ask_everything(first, second);
        }
    }
    let mut random = Random::new(21);
    for _ in 0..20_000 {
        ask_everything(f64::from_bits(random.bits()), f64::from_bits(random.bits()));
        let pressure = random.between_logarithms(1.0, 1e9);
        ask_everything(pressure, f64::from_bits(random.bits()));
        ask_everything(pressure, random.between(-1e7, 1e7));
        ask_everything(pressure, random.between(0.0, 3000.0));
    }
}

#[test]
fn errors_name_the_limit_that_was_crossed() {
    let message = |result: Result<State, WaterError>| result.unwrap_err().to_string();
    assert_eq!(
        message(State::from_pressure_temperature(100.5e6, 300.0)),
        "the pressure of water, 100500000 Pa, is outside 611.212677 Pa to 100000000 Pa"
    );
    assert_eq!(
        message(State::from_pressure_temperature(60e6, 1100.0)),
        "the temperature of water, 1100 K, is outside 273.15 K to 1073.15 K"
    );
    assert_eq!(
        message(State::from_pressure_quality(1e6, 1.2)),
        "the quality of wet steam, 1.2, is outside 0 to 1"
    );
    let below = message(State::from_pressure_enthalpy(1e6, -5e3));
    assert!(below.starts_with("the enthalpy of water, -5000 J/kg, is outside 975.8"), "{below}");
    let above = message(State::from_pressure_entropy(1e6, 14e3));
    assert!(above.starts_with("the entropy of water, 14000 J/(kg K), is outside -0."), "{above}");
    let boiled = Region::ThreeLiquid.properties(20e6, 645.0).unwrap_err().to_string();
    assert_eq!(boiled, "water has no liquid at 20000000 Pa and 645 K: this is beyond its limit of stability");
}

/// A value of enthalpy or entropy from one end of the formulation to the other is answered at every pressure.
#[test]
fn inverses_cover_the_whole_range_and_rise_without_a_gap() -> Result<(), WaterError> {
    let mut random = Random::new(22);
    for _ in 0..300 {
        let pressure = random.between_logarithms(611.3, 100e6);
        let hottest = if pressure <= 50e6 { 2273.15 } else { 1073.15 };
        let cold = State::from_pressure_temperature(pressure, 273.15)?;
        let hot = State::from_pressure_temperature(pressure, hottest)?;
        let (mut by_enthalpy, mut by_entropy) = (cold.temperature, cold.temperature);
        for step in 0..=400 {
            let share = f64::from(step) / 400.0;
            let enthalpy = cold.enthalpy + share * (hot.enthalpy - cold.enthalpy);
            let entropy = cold.entropy + share * (hot.entropy - cold.entropy);
            let found = (temperature_ph(pressure, enthalpy)?.value, temperature_ps(pressure, entropy)?.value);
            assert!(
                found.0 > by_enthalpy - 1e-9 && found.1 > by_entropy - 1e-9,
                "{pressure} {enthalpy} {entropy}"
            );
            (by_enthalpy, by_entropy) = found;
        }
        assert!((by_enthalpy - hottest).abs() < 1e-6 && (by_entropy - hottest).abs() < 1e-6);
    }
    Ok(())
}

/// The steps where regions meet. The release lets them be this small (its sections 4 and 9: 0.2 kJ/kg in enthalpy).
#[test]
fn regions_meet() -> Result<(), WaterError> {
    let mut random = Random::new(23);
    let step = |a: Region, b: Region, pressure, temperature| -> Result<f64, WaterError> {
        Ok((a.enthalpy(pressure, temperature)?.value - b.enthalpy(pressure, temperature)?.value).abs())
    };
    for _ in 0..2000 {
        let pressure = random.between(16.6e6, 100e6);
        assert!(step(Region::One, Region::ThreeLiquid, pressure, 623.15)? < 200.0);
        let pressure = random.between_logarithms(612.0, 50e6);
        assert!(step(Region::Two, Region::Five, pressure, 1073.15)? < 200.0, "{pressure}");
        let temperature = random.between(623.16, 863.0);
        // Bisection for the boundary between regions 2 and 3, of which the public interface only tells the sides.
        let (mut low, mut high) = (16e6, 100e6);
        for _ in 0..60 {
            let middle = 0.5 * (low + high);
            if Region::at(middle, temperature)? == Region::Two { low = middle } else { high = middle }
        }
        assert!(step(Region::Two, Region::ThreeVapour, low, temperature)? < 200.0, "{low} {temperature}");
    }
    Ok(())
}

/// What a solver that holds a phase may do: 3 K beyond saturation, but not beyond the limit of stability, which draws
/// near as the critical point does.
#[test]
fn a_phase_goes_on_past_saturation() -> Result<(), WaterError> {
    let mut random = Random::new(24);
    for _ in 0..3000 {
        let pressure = random.between_logarithms(800.0, 18e6);
        let (saturation_temperature, _) = saturation::temperature(pressure)?;
        for (phase, sign) in [(Phase::Liquid, 1.0), (Phase::Vapour, -1.0)] {
            let mut last = None;
            for step in -10..=10 {
                let temperature = saturation_temperature + sign * 0.3 * f64::from(step);
                if temperature < 273.15 {
                    continue;
                }
                let region = Region::of_phase(phase, pressure, temperature)?;
                assert_eq!(region.phase(), phase);
                let enthalpy = region.enthalpy(pressure, temperature)?.value;
                // A third of a kelvin never moves the enthalpy by more than a tenth of the latent heat.
                assert!(
                    last.is_none_or(|last: f64| (enthalpy - last).abs() < 1e5),
                    "{pressure} {temperature}"
                );
                last = Some(enthalpy);
            }
        }
    }
    Ok(())
}

#[test]
fn above_the_critical_pressure_the_roots_coincide() {
    let mut random = Random::new(25);
    for _ in 0..2000 {
        let (pressure, temperature) = (random.between(22.1e6, 100e6), random.between(630.0, 860.0));
        let liquid = Region::ThreeLiquid.properties(pressure, temperature);
        let vapour = Region::ThreeVapour.properties(pressure, temperature);
        assert_eq!(liquid.map(|all| all.volume.value), vapour.map(|all| all.volume.value));
    }
}

/// All the way to the critical point liquid and vapour approach each other and the derivatives keep their signs.
#[test]
fn saturated_states_are_found_up_to_the_critical_point() -> Result<(), WaterError> {
    let mut width = f64::INFINITY;
    for step in 0..=20_000 {
        let pressure = 22.064e6 - 5e6 * (1.0 - f64::from(step) / 20_000.0).powi(3);
        let (liquid, vapour) = saturation::both(pressure)?;
        let next = vapour.enthalpy.value - liquid.enthalpy.value;
        assert!(next > 0.0 && next < width, "{pressure}");
        assert!(liquid.enthalpy.by_pressure > 0.0 && vapour.enthalpy.by_pressure < 0.0);
        width = next;
    }
    Ok(())
}
