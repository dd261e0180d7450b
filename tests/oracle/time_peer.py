"""Prints the median milliseconds that this way of balancing takes for one balance: IPOPT's solve and all uncertainties.

    python time_peer.py PLANT [REPEATS]

The model, its derivatives and the solver are built once and not counted; each balance starts from the typical values of
the plant file, without the Newton steps that only sharpen the stored results. One thread.
"""

import os
import statistics
import sys
import time

os.environ.setdefault("OMP_NUM_THREADS", "1")
os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")

import numpy as np  # noqa: E402  (after the number of threads is set)

from balance import Balance  # noqa: E402
from model import Model  # noqa: E402
from reconcile import PLANTS, load  # noqa: E402


def main():
    name, repeats = sys.argv[1], int(sys.argv[2]) if len(sys.argv) > 2 else 50
    models = [model for _, model in load(name)]
    tags = models[0].plant["tags"]
    balance = Balance(Model(PLANTS / f"{name}.toml", readings={tag: entry["typical"] for tag, entry in tags.items()}))
    rows = [balance.parameters(model) for model in models]
    solves, sigmas = [], []
    for _ in range(repeats):
        for parameters in rows:
            begin = time.perf_counter()
            found = balance.solver(x0=balance.start, p=parameters, lbg=0, ubg=0, lbx=balance.lower, ubx=balance.upper)
            middle = time.perf_counter()
            balance.uncertainty(np.array(found["x"]).ravel(), parameters)
            solves.append(middle - begin)
            sigmas.append(time.perf_counter() - middle)
    total = statistics.median(a + b for a, b in zip(solves, sigmas))
    print(
        f"{name}: {1e3 * total:.2f} ms a balance (solve {1e3 * statistics.median(solves):.2f} ms, "
        f"uncertainties {1e3 * statistics.median(sigmas):.2f} ms; {len(solves)} balances)"
    )


if __name__ == "__main__":
    main()
