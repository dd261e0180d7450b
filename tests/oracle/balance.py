"""Least squares under equations by IPOPT with exact derivatives, and the linearised uncertainties at the solution.

Minimised is half the sum of ((reading - x) / sigma)^2 subject to every equation of the model. IPOPT's answer is
sharpened by Newton steps on the full Karush-Kuhn-Tucker system with the exact Hessian. Uncertainties are linearised with the
Hessian of the sum of squares alone (Gauss-Newton), by singular value decomposition of dense matrices: nothing is
regularised, what the null space touches is listed as unobservable.
"""

import casadi as ca
import numpy as np

ca.GlobalOptions.setNumpyMode(-1)

_RANK = 1e-9  # singular values below this share of the largest are zero
_TOUCHED = 1e-6  # a quantity is unobservable if its gradient along the null space is more than this share
_IPOPT = {
    "ipopt.tol": 1e-9,
    "ipopt.constr_viol_tol": 1e-9,
    "ipopt.dual_inf_tol": 1e-6,
    "ipopt.max_iter": 500,
    "ipopt.mu_init": 1e-8,
    "ipopt.nlp_scaling_method": "none",
    "ipopt.print_level": 0,
    "ipopt.sb": "yes",
    "print_time": False,
}


class Balance:
    """The optimiser's view of a model; readings and standard deviations are parameters, so that it is built once."""

    def __init__(self, model):
        self.model = model
        self.names = list(model.variables)
        self.scales = np.array([variable.scale for variable in model.variables.values()])
        self.start = np.array([variable.start for variable in model.variables.values()]) / self.scales
        self.x = ca.vertcat(*[variable.symbol for variable in model.variables.values()])
        self.c = ca.vertcat(*[expression for _, expression in model.equations])
        count = len(model.measurements)
        self.y, self.sigma = ca.SX.sym("y", count), ca.SX.sym("sigma", count)
        read = ca.vertcat(*[measurement.expression for measurement in model.measurements])
        residual = (self.y - read) / self.sigma
        self.objective = 0.5 * ca.sumsqr(residual)
        parameters = ca.vertcat(self.y, self.sigma)
        multipliers = ca.SX.sym("lambda", self.c.numel())
        gradient = ca.gradient(self.objective, self.x)
        jacobian = ca.jacobian(self.c, self.x)
        lagrangian = self.objective + ca.dot(multipliers, self.c)
        derived = [name for name, expression in model.derived.items() if not expression.is_constant()]
        self.quantities = [
            name for name in list(model.variables) + derived if not name.endswith("isentropic_temperature")
        ]
        values = ca.vertcat(*[model.quantity(name) for name in self.quantities])
        self.newton = ca.Function(
            "newton", [self.x, multipliers, parameters], [gradient, jacobian, self.c, ca.hessian(lagrangian, self.x)[0]]
        )
        self.linear = ca.Function(
            "linear",
            [self.x, parameters],
            [jacobian, ca.jacobian(residual, self.x), residual, values, ca.jacobian(values, self.x)],
        )
        self.sum_of_squares = ca.Function("sum_of_squares", [self.x, parameters], [2 * self.objective])
        self.solver = ca.nlpsol(
            "balance", "ipopt", {"x": self.x, "f": self.objective, "g": self.c, "p": parameters}, _IPOPT
        )
        self.lower, self.upper = np.array([_range(v) for v in model.variables.values()]).T

    def parameters(self, model=None):
        measurements = (model or self.model).measurements
        return np.array([m.reading for m in measurements] + [m.sigma for m in measurements])

    def solve(self, parameters, start=None):
        """The solution (scaled), its multipliers and the scaled Karush-Kuhn-Tucker residual."""
        found = self.solver(
            x0=self.start if start is None else start, p=parameters, lbg=0, ubg=0, lbx=self.lower, ubx=self.upper
        )
        self.status = self.solver.stats()["return_status"]
        self.iterations = self.solver.stats()["iter_count"]
        assert np.all(np.abs(np.array(found["lam_x"])) < 1e-4), "a bound of the search was reached"
        x, multipliers = np.array(found["x"]).ravel(), np.array(found["lam_g"]).ravel()
        for _ in range(3):
            gradient, jacobian, c, hessian = (np.array(part) for part in self.newton(x, multipliers, parameters))
            n, m = len(x), len(multipliers)
            matrix = np.block([[hessian, jacobian.T], [jacobian, np.zeros((m, m))]])
            right = -np.concatenate([gradient.ravel() + jacobian.T @ multipliers, c.ravel()])
            step = _equilibrated_least_squares(matrix, right)
            x, multipliers = x + step[:n], multipliers + step[n:]
        residual = self.residual(x, multipliers, parameters)
        polished = float(self.sum_of_squares(x, parameters)) - 2 * float(found["f"])
        assert abs(polished) < 1e-5, f"the Newton steps left IPOPT's solution: sum of squares changed by {polished:.1e}"
        return x, multipliers, residual

    def residual(self, x, multipliers, parameters):
        """Largest entry of the Karush-Kuhn-Tucker residual, each relative to its largest term."""
        gradient, jacobian, c, _ = (np.array(part) for part in self.newton(x, multipliers, parameters))
        terms = np.abs(jacobian.T) * np.abs(multipliers)
        size = np.maximum(np.maximum(terms.max(axis=1), np.abs(gradient.ravel())), 1.0)
        dual = np.abs(gradient.ravel() + jacobian.T @ multipliers) / size
        primal = np.abs(c.ravel()) / np.maximum(np.abs(jacobian * x).max(axis=1), 1e-9)
        return float(max(dual.max(), primal.max()))

    def uncertainty(self, x, parameters):
        """Sum of squares, degrees of freedom, values, standard uncertainties, and what the null space touches."""
        jacobian, residual_jacobian, residual, values, gradients = (
            np.array(part) for part in self.linear(x, parameters)
        )
        rows = np.linalg.norm(jacobian, axis=1, keepdims=True)
        left, singular, right = np.linalg.svd(jacobian / rows)
        rank = int((singular > _RANK * singular[0]).sum())
        self.singular_gap = (singular[rank - 1], singular[rank] if rank < len(singular) else 0.0)
        self.dependent_equations = len(rows) - rank
        basis = right[rank:].T
        reduced = residual_jacobian @ basis
        _, singular, right = np.linalg.svd(reduced)
        information = int((singular > _RANK * singular[0]).sum())
        self.information_gap = (
            singular[information - 1],
            singular[information] if information < len(singular) else 0.0,
        )
        unseen = basis @ right[information:].T
        self.null_directions = unseen.shape[1]
        gain = basis @ right[:information].T / singular[:information]
        spread = gradients @ gain
        sigma = np.sqrt((spread**2).sum(axis=1))
        touched = np.linalg.norm(gradients @ unseen, axis=1) > _TOUCHED * np.linalg.norm(gradients, axis=1)
        correction = residual_jacobian @ gain
        self.redundancies = 1 - (correction**2).sum(axis=1)
        degrees = len(residual) - information
        return float((residual**2).sum()), degrees, values.ravel(), sigma, touched


def _equilibrated_least_squares(matrix, right):
    scale = 1 / np.sqrt(np.maximum(np.abs(matrix).max(axis=1), 1e-12))
    return scale * np.linalg.lstsq(matrix * scale[:, None] * scale[None, :], right * scale, rcond=1e-13)[0]


def _range(variable):
    """Wide bounds round the start that keep the property equations defined on the way; checked inactive by `solve`."""
    if variable.name.endswith("pressure"):
        low, high = variable.start / 4, min(variable.start * 4, 100e6)
    elif variable.name.endswith("temperature"):
        low, high = max(variable.start - 120.0, 273.16), variable.start + 120.0
    else:
        return -np.inf, np.inf
    return low / variable.scale, high / variable.scale
