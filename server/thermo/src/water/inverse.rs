//! Where water of a given pressure and enthalpy, or pressure and entropy, is.

use super::error::check_pressure;
use super::region::highest_temperature;
use super::saturation::{AlongSaturation, Saturated};
use super::{
    CRITICAL_DENSITY, CRITICAL_PRESSURE, CRITICAL_TEMPERATURE, HIGHEST_PRESSURE, HIGHEST_TEMPERATURE,
    LOWEST_PRESSURE, LOWEST_TEMPERATURE, Partial, Properties, REGION_1_HIGHEST_TEMPERATURE,
    REGION_2_HIGHEST_TEMPERATURE, REGION_3_LOWEST_PRESSURE, REGION_5_HIGHEST_PRESSURE, Region, WaterError,
    backward1, backward2, backward3, boundary, region3, saturation,
};

/// What is given besides the pressure. It rises with temperature in every region.
pub(super) trait Coordinate {
    /// No state of region 1 has more.
    const HIGHEST_IN_1: f64;
    /// No state of region 2 has less.
    const LOWEST_IN_2: f64;

    fn at(region: Region, pressure: f64, temperature: f64) -> Result<Partial, WaterError>;
    fn of(properties: &Properties) -> Partial;
    fn of_saturated(saturated: &Saturated) -> AlongSaturation;
    fn by_density(state: &region3::ByDensity) -> region3::Slopes;
    fn start_1(pressure: f64, value: f64) -> f64;
    fn start_2(pressure: f64, value: f64) -> f64;
    fn start_3(pressure: f64, value: f64) -> (f64, f64);
    fn outside(value: f64, minimum: f64, maximum: f64, pressure: f64) -> WaterError;
}

pub(super) struct Enthalpy;
pub(super) struct Entropy;

impl Coordinate for Enthalpy {
    const HIGHEST_IN_1: f64 = 1.671e6;
    const LOWEST_IN_2: f64 = 2.500e6;

    #[inline]
    fn at(region: Region, pressure: f64, temperature: f64) -> Result<Partial, WaterError> {
        region.enthalpy(pressure, temperature)
    }
    fn of(properties: &Properties) -> Partial {
        properties.enthalpy
    }
    fn of_saturated(saturated: &Saturated) -> AlongSaturation {
        saturated.enthalpy
    }
    fn by_density(state: &region3::ByDensity) -> region3::Slopes {
        state.enthalpy
    }
    fn start_1(pressure: f64, value: f64) -> f64 {
        backward1::temperature_ph(pressure, value)
    }
    fn start_2(pressure: f64, value: f64) -> f64 {
        backward2::temperature_ph(pressure, value)
    }
    fn start_3(pressure: f64, value: f64) -> (f64, f64) {
        backward3::temperature_volume_ph(pressure, value)
    }
    fn outside(value: f64, minimum: f64, maximum: f64, pressure: f64) -> WaterError {
        WaterError::Enthalpy { value, minimum, maximum, pressure }
    }
}

impl Coordinate for Entropy {
    const HIGHEST_IN_1: f64 = 3.779e3;
    const LOWEST_IN_2: f64 = 5.0e3;

    #[inline]
    fn at(region: Region, pressure: f64, temperature: f64) -> Result<Partial, WaterError> {
        Ok(region.properties(pressure, temperature)?.entropy)
    }
    fn of(properties: &Properties) -> Partial {
        properties.entropy
    }
    fn of_saturated(saturated: &Saturated) -> AlongSaturation {
        saturated.entropy
    }
    fn by_density(state: &region3::ByDensity) -> region3::Slopes {
        state.entropy
    }
    fn start_1(pressure: f64, value: f64) -> f64 {
        backward1::temperature_ps(pressure, value)
    }
    fn start_2(pressure: f64, value: f64) -> f64 {
        backward2::temperature_ps(pressure, value)
    }
    fn start_3(pressure: f64, value: f64) -> (f64, f64) {
        backward3::temperature_volume_ps(pressure, value)
    }
    fn outside(value: f64, minimum: f64, maximum: f64, pressure: f64) -> WaterError {
        WaterError::Entropy { value, minimum, maximum, pressure }
    }
}

/// A state that was found.
pub(super) enum Location {
    /// In region 1, 2 or 5, with the given quantity's derivatives.
    Explicit { region: Region, temperature: f64, given: Partial },
    /// In region 3, where the density is found along with the temperature.
    Dense { region: Region, temperature: f64, properties: Properties },
    /// Between saturated liquid and vapour.
    Mixture { temperature: f64, temperature_by_pressure: f64 },
}

/// Finds the state with `value` of the coordinate at a pressure.
pub(super) fn locate<C: Coordinate>(pressure: f64, value: f64) -> Result<Location, WaterError> {
    check_pressure(pressure, LOWEST_PRESSURE, HIGHEST_PRESSURE)?;
    if !value.is_finite() {
        return Err(outside::<C>(pressure, value));
    }
    if pressure > REGION_3_LOWEST_PRESSURE {
        let borders = (REGION_1_HIGHEST_TEMPERATURE, boundary::temperature(pressure));
        return match explicit::<C>(pressure, value, borders)? {
            Some(found) => Ok(found),
            None => dense::<C>(pressure, value),
        };
    }
    let (temperature, temperature_by_pressure) = saturation::temperature(pressure)?;
    let found = explicit::<C>(pressure, value, (temperature, temperature))?;
    Ok(found.unwrap_or(Location::Mixture { temperature, temperature_by_pressure }))
}

/// Looks in regions 1, 2 and 5. `borders` are the highest temperature of region 1 and the lowest of region 2 at this
/// pressure; `None` means that the state lies between them.
fn explicit<C: Coordinate>(
    pressure: f64,
    value: f64,
    borders: (f64, f64),
) -> Result<Option<Location>, WaterError> {
    if value <= C::HIGHEST_IN_1 {
        let range = (LOWEST_TEMPERATURE - ROUNDING, borders.0);
        return match solve::<C>(Region::One, pressure, value, C::start_1(pressure, value), range)? {
            Root::Below => Err(outside::<C>(pressure, value)),
            Root::Found(location) => Ok(Some(location)),
            Root::Above => Ok(None),
        };
    }
    if value < C::LOWEST_IN_2 {
        return Ok(None);
    }
    let range = (borders.1, REGION_2_HIGHEST_TEMPERATURE + ROUNDING);
    match solve::<C>(Region::Two, pressure, value, C::start_2(pressure, value), range)? {
        Root::Below => Ok(None),
        Root::Found(location) => Ok(Some(location)),
        Root::Above => hot::<C>(pressure, value).map(Some),
    }
}

/// Looks in region 5.
fn hot<C: Coordinate>(pressure: f64, value: f64) -> Result<Location, WaterError> {
    if pressure <= REGION_5_HIGHEST_PRESSURE {
        let range = (REGION_2_HIGHEST_TEMPERATURE - SEAM, HIGHEST_TEMPERATURE + ROUNDING);
        if let Root::Found(location) = solve::<C>(Region::Five, pressure, value, REGION_5_START, range)? {
            return Ok(location);
        }
    }
    Err(outside::<C>(pressure, value))
}

/// Heat capacities hardly vary in region 5: any start does, K.
const REGION_5_START: f64 = 1600.0;
/// Temperatures at the ends of the formulation may be missed by this, K.
const ROUNDING: f64 = 1e-6;
/// The equations of regions 2 and 5 differ a little where they meet. A value between them counts as region 5's, K.
const SEAM: f64 = 1.0;

/// The error of a value that no state at this pressure has.
#[cold]
fn outside<C: Coordinate>(pressure: f64, value: f64) -> WaterError {
    let highest = highest_temperature(pressure);
    let hottest = if highest > REGION_2_HIGHEST_TEMPERATURE { Region::Five } else { Region::Two };
    match (C::at(Region::One, pressure, LOWEST_TEMPERATURE), C::at(hottest, pressure, highest)) {
        (Ok(lowest), Ok(highest)) => C::outside(value, lowest.value, highest.value, pressure),
        (Err(error), _) | (_, Err(error)) => error,
    }
}

/// Where a root lies with respect to a range of temperatures.
enum Root {
    Below,
    Found(Location),
    Above,
}

/// Newton's method for the temperature in a region that is explicit in (p,T), kept between the temperatures of
/// `range`. The coordinate rises with temperature, so that a step out of an end tells that the root is beyond it.
#[inline]
fn solve<C: Coordinate>(
    region: Region,
    pressure: f64,
    value: f64,
    start: f64,
    range: (f64, f64),
) -> Result<Root, WaterError> {
    let (lowest, highest) = range;
    // A start that isn't a number begins at the lower end.
    let mut temperature = start.max(lowest).min(highest);
    for _ in 0..MOST_STEPS {
        let given = C::at(region, pressure, temperature)?;
        let next = temperature + (value - given.value) / given.by_temperature;
        let settled = (next - temperature).abs() < RESOLUTION;
        if next < lowest && (settled || temperature == lowest) {
            return Ok(Root::Below);
        }
        if next > highest && (settled || temperature == highest) {
            return Ok(Root::Above);
        }
        if settled {
            return Ok(Root::Found(Location::Explicit { region, temperature: next, given }));
        }
        temperature = next.max(lowest).min(highest);
    }
    Err(outside::<C>(pressure, value))
}

/// Step after which the next one would be below a rounding error, and over which no derivative changes, K.
const RESOLUTION: f64 = 1e-6;
const MOST_STEPS: usize = 30;

/// Looks in region 3 and in the two-phase states below it.
fn dense<C: Coordinate>(pressure: f64, value: f64) -> Result<Location, WaterError> {
    if pressure < CRITICAL_PRESSURE {
        let (liquid, vapour) = saturation::both(pressure)?;
        if (C::of_saturated(&liquid).value..=C::of_saturated(&vapour).value).contains(&value) {
            return Ok(Location::Mixture {
                temperature: liquid.temperature.value,
                temperature_by_pressure: liquid.temperature.by_pressure,
            });
        }
    }
    let (mut temperature, volume) = C::start_3(pressure, value);
    let mut density = 1.0 / volume;
    for _ in 0..MOST_STEPS {
        let state = region3::by_density(density, temperature);
        let (p, c) = (state.pressure, C::by_density(&state));
        let determinant = p.by_density * c.by_temperature - p.by_temperature * c.by_density;
        let (missing_p, missing_c) = (pressure - p.value, value - c.value);
        let density_step = (missing_p * c.by_temperature - missing_c * p.by_temperature) / determinant;
        let temperature_step = (missing_c * p.by_density - missing_p * c.by_density) / determinant;
        density += density_step;
        temperature += temperature_step;
        if density_step.abs() < 1e-9 * density && temperature_step.abs() < RESOLUTION {
            let properties = region3::by_density(density, temperature).by_pressure(density);
            let liquid = temperature < CRITICAL_TEMPERATURE && density > CRITICAL_DENSITY;
            let region = if liquid { Region::ThreeLiquid } else { Region::ThreeVapour };
            return Ok(Location::Dense { region, temperature, properties });
        }
    }
    Err(outside::<C>(pressure, value))
}
