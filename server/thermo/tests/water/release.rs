//! The tables for computer-program verification of IAPWS R7-97(2012), to the last printed digit.

use meterwright_thermo::water::{Region, WaterError, saturation};

/// The printed columns of a state: (T/K, p/MPa) -> v, h, u, s, cp, w in m3/kg, kJ/kg, kJ/kg, kJ/(kg K), kJ/(kg K), m/s.
type Row = ((f64, f64), [f64; 6]);

/// Table 5.
const REGION_1: [Row; 3] = [
    ((300.0, 3.0), [0.100215168e-2, 0.115331273e3, 0.112324818e3, 0.392294792, 0.417301218e1, 0.150773921e4]),
    (
        (300.0, 80.0),
        [0.971180894e-3, 0.184142828e3, 0.106448356e3, 0.368563852, 0.401008987e1, 0.163469054e4],
    ),
    (
        (500.0, 3.0),
        [0.120241800e-2, 0.975542239e3, 0.971934985e3, 0.258041912e1, 0.465580682e1, 0.124071337e4],
    ),
];

/// Table 15.
const REGION_2: [Row; 3] = [
    (
        (300.0, 0.0035),
        [0.394913866e2, 0.254991145e4, 0.241169160e4, 0.852238967e1, 0.191300162e1, 0.427920172e3],
    ),
    (
        (700.0, 0.0035),
        [0.923015898e2, 0.333568375e4, 0.301262819e4, 0.101749996e2, 0.208141274e1, 0.644289068e3],
    ),
    (
        (700.0, 30.0),
        [0.542946619e-2, 0.263149474e4, 0.246861076e4, 0.517540298e1, 0.103505092e2, 0.480386523e3],
    ),
];

/// Table 33, read backwards: the pressures are printed there, the densities 500, 200 and 500 kg/m3 are given.
const REGION_3: [Row; 3] = [
    (
        (650.0, 0.255837018e2),
        [1.0 / 500.0, 0.186343019e4, 0.181226279e4, 0.405427273e1, 0.138935717e2, 0.502005554e3],
    ),
    (
        (650.0, 0.222930643e2),
        [1.0 / 200.0, 0.237512401e4, 0.226365868e4, 0.485438792e1, 0.446579342e2, 0.383444594e3],
    ),
    (
        (750.0, 0.783095639e2),
        [1.0 / 500.0, 0.225868845e4, 0.210206932e4, 0.446971906e1, 0.634165359e1, 0.760696041e3],
    ),
];

/// Table 42.
const REGION_5: [Row; 3] = [
    (
        (1500.0, 0.5),
        [0.138455090e1, 0.521976855e4, 0.452749310e4, 0.965408875e1, 0.261609445e1, 0.917068690e3],
    ),
    (
        (1500.0, 30.0),
        [0.230761299e-1, 0.516723514e4, 0.447495124e4, 0.772970133e1, 0.272724317e1, 0.928548002e3],
    ),
    (
        (2000.0, 30.0),
        [0.311385219e-1, 0.657122604e4, 0.563707038e4, 0.853640523e1, 0.288569882e1, 0.106736948e4],
    ),
];

fn computed(region: Region, temperature: f64, pressure: f64) -> Result<[f64; 6], WaterError> {
    let properties = region.properties(pressure, temperature)?;
    let (volume, enthalpy) = (properties.volume, properties.enthalpy);
    let heat_capacity = enthalpy.by_temperature;
    // Isentropic compressibility from the isothermal one: w^2 = -v^2 / (dv/dp)_s.
    let isentropic = volume.by_pressure + temperature * volume.by_temperature.powi(2) / heat_capacity;
    Ok([
        volume.value,
        enthalpy.value / 1e3,
        (enthalpy.value - pressure * volume.value) / 1e3,
        properties.entropy.value / 1e3,
        heat_capacity / 1e3,
        volume.value / (-isentropic).sqrt(),
    ])
}

#[track_caller]
fn same_digits(value: f64, printed: f64, digits: usize) {
    let (value, printed) = (format!("{value:.*e}", digits - 1), format!("{printed:.*e}", digits - 1));
    assert_eq!(value, printed);
}

fn check(region: Region, rows: &[Row]) -> Result<(), WaterError> {
    for &((temperature, pressure), printed) in rows {
        let pressure = pressure * 1e6;
        assert_eq!(Region::at(pressure, temperature)?, region);
        for (value, printed) in computed(region, temperature, pressure)?.into_iter().zip(printed) {
            same_digits(value, printed, 9);
        }
        let enthalpy = region.enthalpy(pressure, temperature)?;
        let full = region.properties(pressure, temperature)?.enthalpy;
        assert!((enthalpy.value / full.value - 1.0).abs() < 1e-14);
        assert!((enthalpy.by_pressure / full.by_pressure - 1.0).abs() < 1e-12);
        assert!((enthalpy.by_temperature / full.by_temperature - 1.0).abs() < 1e-12);
    }
    Ok(())
}

#[test]
fn table_5_region_1() -> Result<(), WaterError> {
    check(Region::One, &REGION_1)
}

#[test]
fn table_15_region_2() -> Result<(), WaterError> {
    check(Region::Two, &REGION_2)
}

/// The pressures are given with nine digits, which leaves seven of the flattest isotherm's properties.
#[test]
fn table_33_region_3() -> Result<(), WaterError> {
    for ((temperature, pressure), printed) in REGION_3 {
        let region = Region::at(pressure * 1e6, temperature)?;
        assert_eq!(region, Region::ThreeVapour);
        for (value, printed) in computed(region, temperature, pressure * 1e6)?.into_iter().zip(printed) {
            assert!((value / printed - 1.0).abs() < 1e-7, "{value} {printed}");
        }
    }
    Ok(())
}

#[test]
fn table_42_region_5() -> Result<(), WaterError> {
    check(Region::Five, &REGION_5)
}

#[test]
fn table_35_saturation_pressure() -> Result<(), WaterError> {
    for (temperature, printed) in [(300.0, 0.353658941e-2), (500.0, 0.263889776e1), (600.0, 0.123443146e2)] {
        same_digits(saturation::pressure(temperature)?.0 / 1e6, printed, 9);
    }
    Ok(())
}

#[test]
fn table_36_saturation_temperature() -> Result<(), WaterError> {
    for (pressure, printed) in [(0.1, 0.372755919e3), (1.0, 0.453035632e3), (10.0, 0.584149488e3)] {
        same_digits(saturation::temperature(pressure * 1e6)?.0, printed, 9);
    }
    Ok(())
}

/// Saturation table by pressure of W. Wagner, H.-J. Kretzschmar, International Steam Tables (2008), from memory:
/// p/MPa, v', v'' in m3/kg, h', h'' in kJ/kg, s', s'' in kJ/(kg K), to six digits.
#[test]
fn steam_tables_at_saturation() -> Result<(), WaterError> {
    for (pressure, printed) in [
        (0.1, [0.00104315, 1.69402, 417.436, 2674.95, 1.30256, 7.35881]),
        (1.0, [0.00112723, 0.194349, 762.683, 2777.12, 2.13843, 6.58498]),
        (10.0, [0.00145262, 0.0180336, 1407.87, 2725.47, 3.36029, 5.61589]),
    ] {
        let (liquid, vapour) = saturation::both(pressure * 1e6)?;
        let computed = [
            liquid.volume.value,
            vapour.volume.value,
            liquid.enthalpy.value / 1e3,
            vapour.enthalpy.value / 1e3,
            liquid.entropy.value / 1e3,
            vapour.entropy.value / 1e3,
        ];
        for (value, printed) in computed.into_iter().zip(printed) {
            same_digits(value, printed, 6);
        }
    }
    Ok(())
}
