"""Water and steam after IAPWS R7-97(2012), regions 1, 2 and 4, as CasADi expressions.

The coefficients of the basic equations are read at run time out of the PyPI package `iapws`; this file and the
repository hold none of them. Pressures in Pa, temperatures in K, enthalpies in J/kg, entropies in J/(kg K), densities
in kg/m3.
"""

import inspect
import re

import casadi as ca
from iapws import iapws97

_SPECIFIC_GAS_CONSTANT = 461.526  # J/(kg K), IAPWS R7-97 eq. (1)
_CONST = iapws97.Const


def _saturation_coefficients():
    """The ten coefficients of the saturation equation, parsed from the text of the package's own function."""
    text = inspect.getsource(iapws97._PSat_T)
    numbers = re.search(r"n = \(0,(.*?)\)", text, re.S).group(1)
    return [0.0] + [float(number) for number in numbers.replace("\n", " ").split(",")]


_SATURATION = _saturation_coefficients()


class _Powers:
    """Integer powers of one expression, each made once by multiplication."""

    def __init__(self, base):
        self.table = {0: 1.0, 1: base, -1: 1.0 / base}

    def __getitem__(self, exponent):
        if exponent not in self.table:
            half = int(exponent / 2)
            self.table[exponent] = self[half] * self[exponent - half]
        return self.table[exponent]


def _sum(terms):
    total = 0.0
    for term in terms:
        total = total + term
    return total


def region_1(pressure, temperature):
    """Enthalpy, entropy and density of liquid water."""
    tau = 1386.0 / temperature
    pi = pressure / 16.53e6
    first, second = _Powers(7.1 - pi), _Powers(tau - 1.222)
    rows = list(zip(_CONST.Region1_n, map(int, _CONST.Region1_Li), map(int, _CONST.Region1_Lj)))
    gamma = _sum(n * first[i] * second[j] for n, i, j in rows)
    gamma_tau = _sum(n * j * first[i] * second[j - 1] for n, i, j in rows if j != 0)
    gamma_pi = _sum(-n * i * first[i - 1] * second[j] for n, i, j in rows if i != 0)
    return _from_gibbs(pressure, temperature, tau, pi, gamma, gamma_tau, gamma_pi)


def region_2(pressure, temperature):
    """Enthalpy, entropy and density of steam."""
    tau = 540.0 / temperature
    pi = pressure / 1e6
    first, second, ideal = _Powers(pi), _Powers(tau - 0.5), _Powers(tau)
    rows = list(zip(_CONST.Region2_n, map(int, _CONST.Region2_Li), map(int, _CONST.Region2_Lj)))
    ideal_rows = list(zip(_CONST.Region2_cp0_no, map(int, _CONST.Region2_cp0_Jo)))
    gamma = ca.log(pi) + _sum(n * ideal[j] for n, j in ideal_rows) + _sum(n * first[i] * second[j] for n, i, j in rows)
    gamma_tau = _sum(n * j * ideal[j - 1] for n, j in ideal_rows if j != 0) + _sum(
        n * j * first[i] * second[j - 1] for n, i, j in rows if j != 0
    )
    gamma_pi = 1.0 / pi + _sum(n * i * first[i - 1] * second[j] for n, i, j in rows)
    return _from_gibbs(pressure, temperature, tau, pi, gamma, gamma_tau, gamma_pi)


def _from_gibbs(pressure, temperature, tau, pi, gamma, gamma_tau, gamma_pi):
    enthalpy = _SPECIFIC_GAS_CONSTANT * temperature * tau * gamma_tau
    entropy = _SPECIFIC_GAS_CONSTANT * (tau * gamma_tau - gamma)
    density = pressure / (_SPECIFIC_GAS_CONSTANT * temperature * pi * gamma_pi)
    return enthalpy, entropy, density


def saturation_temperature(pressure):
    """Temperature of saturated water, K: IAPWS R7-97 eq. (31)."""
    n = _SATURATION
    beta = (pressure / 1e6) ** 0.25
    e = beta**2 + n[3] * beta + n[6]
    f = n[1] * beta**2 + n[4] * beta + n[7]
    g = n[2] * beta**2 + n[5] * beta + n[8]
    d = 2 * g / (-f - ca.sqrt(f**2 - 4 * e * g))
    return (n[10] + d - ca.sqrt((n[10] + d) ** 2 - 4 * (n[9] + n[10] * d))) / 2


def saturated(pressure):
    """Temperature, then (enthalpy, entropy, density) of the liquid and of the vapour, at saturation."""
    temperature = saturation_temperature(pressure)
    return temperature, region_1(pressure, temperature), region_2(pressure, temperature)


def verify():
    """Raises unless the verification values printed in IAPWS R7-97 (tables 5, 15 and 36) come out."""
    p, t = ca.SX.sym("p"), ca.SX.sym("t")
    first = ca.Function("first", [p, t], list(region_1(p, t)))
    second = ca.Function("second", [p, t], list(region_2(p, t)))
    line = ca.Function("line", [p], [saturation_temperature(p)])
    checks = [
        (first(3e6, 300)[0], 115.331273e3),
        (first(80e6, 300)[1], 368.563852),
        (first(3e6, 500)[0], 975.542239e3),
        (1 / first(3e6, 300)[2], 0.00100215168),
        (second(3500, 300)[0], 2549.91145e3),
        (second(30e6, 700)[0], 2631.49474e3),
        (second(30e6, 700)[1], 5175.40298),
        (1 / second(30e6, 700)[2], 0.00542946619),
        (line(0.1e6), 372.755919),
        (line(1e6), 453.035632),
        (line(10e6), 584.149488),
    ]
    for computed, printed in checks:
        assert abs(float(computed) / printed - 1) < 5e-9, (float(computed), printed)


if __name__ == "__main__":
    verify()
    print("IAPWS R7-97 verification values: all agree to the digits printed")
