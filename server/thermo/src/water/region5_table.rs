//! Coefficients of the fundamental equation of region 5.

use super::polynomial::terms;

terms! {
    /// Table 37 of IAPWS R7-97(2012): `(0, J, n)` of the ideal-gas part, equation (33).
    Equation33:
    (0, 0, -0.13179983674201e2),
    (0, 1, 0.68540841634434e1),
    (0, -3, -0.24805148933466e-1),
    (0, -2, 0.36901534980333),
    (0, -1, -0.31161318213925e1),
    (0, 2, -0.32961626538917),
}

terms! {
    /// Table 38 of IAPWS R7-97(2012): `(I, J, n)` of the residual part, equation (34).
    Equation34:
    (1, 1, 0.15736404855259e-2),
    (1, 2, 0.90153761673944e-3),
    (1, 3, -0.50270077677648e-2),
    (2, 3, 0.22440037409485e-5),
    (2, 9, -0.41163275453471e-5),
    (3, 7, 0.37919454822955e-7),
}
