//! The boundary between regions 2 and 3: equations (5) and (6) of IAPWS R7-97(2012).

/// Table 1 of IAPWS R7-97(2012).
const N: [f64; 5] =
    [0.34805185628969e3, -0.11671859879975e1, 0.10192970039326e-2, 0.57254459862746e3, 0.13918839778870e2];

/// Pressure of the boundary at a temperature, Pa from K. Meant for 623.15 K to 863.15 K.
#[inline]
pub(super) fn pressure(temperature: f64) -> f64 {
    (N[0] + temperature * (N[1] + temperature * N[2])) * 1e6
}

/// Temperature of the boundary at a pressure, K from Pa. Meant for 16.5292 megapascal to 100 megapascal.
#[inline]
pub(super) fn temperature(pressure: f64) -> f64 {
    N[3] + ((pressure / 1e6 - N[4]) / N[2]).sqrt()
}

#[cfg(test)]
mod tests {
    /// Section 4 of IAPWS R7-97(2012): the point 623.15 K, 16.5291643 megapascal fulfils both equations.
    #[test]
    fn the_printed_point_lies_on_the_boundary() {
        assert!((super::pressure(623.15) - 0.165291643e8).abs() < 0.5e0);
        assert!((super::temperature(0.165291643e8) - 0.623150000e3).abs() < 0.5e-6);
    }
}
