//! How long the properties of water take, beside the crate `seuif97` in the same run. Ours come with their exact
//! derivatives and, where inverse, agree with the forward equations to rounding; the peer's are values alone.
//!
//! `cargo bench --bench water`

use std::hint::black_box;
use std::time::Duration;

use criterion::{Criterion, criterion_group, criterion_main};
use meterwright_thermo::water::{
    Region, State, WaterError, enthalpy_ps, entropy_ph, saturation, temperature_ph, volume_ph,
};

/// States in one region, evenly spread by two golden sections.
fn states(count: u32, within: impl Fn(f64, f64) -> Option<(Region, f64, f64)>) -> Vec<(Region, f64, f64)> {
    let spread = |k: u32, step: f64| (f64::from(k) * step).fract();
    (0..count).filter_map(|k| within(spread(k, 0.754_877_666), spread(k, 0.569_840_291))).collect()
}

fn liquid(x: f64, y: f64) -> Option<(Region, f64, f64)> {
    let temperature = 290.0 + 320.0 * x;
    Some((Region::One, saturation::pressure(temperature).ok()?.0 + 30e6 * y, temperature))
}

fn vapour(x: f64, y: f64) -> Option<(Region, f64, f64)> {
    let pressure = 5e3 * (16e6_f64 / 5e3).powf(x);
    Some((Region::Two, pressure, saturation::temperature(pressure).ok()?.0 + 1.0 + 250.0 * y))
}

fn near_critical(x: f64, y: f64) -> Option<(Region, f64, f64)> {
    let (pressure, temperature) = (17e6 + 30e6 * x, 624.0 + 100.0 * y);
    let region = Region::at(pressure, temperature).ok()?;
    matches!(region, Region::ThreeLiquid | Region::ThreeVapour).then_some((region, pressure, temperature))
}

/// Times a function over all states in turn.
fn time<I: Copy>(criterion: &mut Criterion, name: &str, states: &[I], function: impl Fn(I) -> f64) {
    let mut states = states.iter().cycle();
    criterion.bench_function(name, |bencher| {
        bencher.iter(|| states.next().map(|&state| function(black_box(state))));
    });
}

fn forward(criterion: &mut Criterion, name: &str, states: &[(Region, f64, f64)]) {
    time(criterion, &format!("h(p,T), derivatives, {name}"), states, |(region, p, t)| {
        region.enthalpy(p, t).map_or(f64::NAN, |h| h.value + h.by_pressure + h.by_temperature)
    });
    time(criterion, &format!("v h s(p,T), derivatives, {name}"), states, |(region, p, t)| {
        region.properties(p, t).map_or(f64::NAN, |all| all.volume.by_pressure + all.entropy.value)
    });
    time(criterion, &format!("h(p,T), peer, {name}"), states, |(_, p, t)| {
        seuif97::pt(p / 1e6, t - 273.15, seuif97::OH)
    });
}

fn inverse(criterion: &mut Criterion, name: &str, states: &[(f64, f64, f64)]) {
    time(criterion, &format!("T(p,h), derivatives, {name}"), states, |(p, h, _)| {
        temperature_ph(p, h).map_or(f64::NAN, |t| t.value + t.by_pressure + t.by_enthalpy)
    });
    time(criterion, &format!("T(p,h), peer, {name}"), states, |(p, h, _)| {
        seuif97::ph(p / 1e6, h / 1e3, seuif97::OT)
    });
    time(criterion, &format!("s(p,h), derivatives, {name}"), states, |(p, h, _)| {
        entropy_ph(p, h).map_or(f64::NAN, |s| s.value + s.by_pressure + s.by_enthalpy)
    });
    time(criterion, &format!("v(p,h), derivatives, {name}"), states, |(p, h, _)| {
        volume_ph(p, h).map_or(f64::NAN, |v| v.value + v.by_pressure + v.by_enthalpy)
    });
    time(criterion, &format!("h(p,s), derivatives, {name}"), states, |(p, _, s)| {
        enthalpy_ps(p, s).map_or(f64::NAN, |h| h.value + h.by_pressure + h.by_entropy)
    });
    time(criterion, &format!("h(p,s), peer, {name}"), states, |(p, _, s)| {
        seuif97::ps(p / 1e6, s / 1e3, seuif97::OH)
    });
}

fn single_phase(state: &(Region, f64, f64)) -> Result<(f64, f64, f64), WaterError> {
    let &(region, pressure, temperature) = state;
    let properties = region.properties(pressure, temperature)?;
    Ok((pressure, properties.enthalpy.value, properties.entropy.value))
}

fn wet(state: &(Region, f64, f64)) -> Result<(f64, f64, f64), WaterError> {
    let state = State::from_pressure_quality(state.1, 0.85 + 0.14 * (state.2 - state.2.floor()))?;
    Ok((state.pressure, state.enthalpy, state.entropy))
}

fn water(criterion: &mut Criterion) {
    let (liquid, vapour, near_critical) =
        (states(4096, liquid), states(4096, vapour), states(8192, near_critical));
    for (name, states) in [("liquid", &liquid), ("vapour", &vapour), ("region 3", &near_critical)] {
        forward(criterion, name, states);
        let states: Vec<_> = states.iter().flat_map(single_phase).collect();
        inverse(criterion, name, &states);
    }
    let wet: Vec<_> = vapour.iter().flat_map(wet).collect();
    inverse(criterion, "wet steam", &wet);
    time(criterion, "saturation temperature, derivative", &vapour, |(_, p, _)| {
        saturation::temperature(p).map_or(f64::NAN, |(value, slope)| value + slope)
    });
}

criterion_group! {
    name = benches;
    config = Criterion::default().warm_up_time(Duration::from_millis(300)).measurement_time(Duration::from_secs(1));
    targets = water
}
criterion_main!(benches);
