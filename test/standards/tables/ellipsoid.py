"""Writes ellipsoid.json: hard and soft iron of noisy magnetometer readings as SciPy's least squares finds them.

Run from this folder: python3 ellipsoid.py
Stored table made with SciPy 1.17.1, NumPy 2.4.6 (also recorded in the table itself).
Minimises the sum of (|A (m - b)| - field)^2 over b and the symmetric matrix A, begun at the truth, since a far centre with a
vanishing matrix fits anything; numerical slopes.
"""

import json

import numpy as np
import scipy
from scipy.optimize import least_squares

FIELD = 50.0
rng = np.random.default_rng(20260602)


def symmetric(e):
    return np.array([[e[0], e[3], e[4]], [e[3], e[1], e[5]], [e[4], e[5], e[2]]])


def case(share):
    """Readings of directions within a cap that holds this share of the sphere."""
    soft = symmetric(np.concatenate([1 + rng.uniform(-0.1, 0.1, 3), rng.uniform(-0.1, 0.1, 3)]))
    hard = rng.uniform(-60, 60, 3)
    z = rng.uniform(1 - 2 * share, 1, 150)
    angle = rng.uniform(0, 2 * np.pi, 150)
    level = np.sqrt(1 - z * z)
    directions = np.stack([level * np.cos(angle), level * np.sin(angle), z], axis=1)
    readings = np.round(FIELD * directions @ np.linalg.inv(soft) + hard + rng.normal(0, 0.4, (150, 3)), 4)

    def off(p):
        return np.linalg.norm((readings - p[:3]) @ symmetric(p[3:]), axis=1) - FIELD

    truth = [soft[0, 0], soft[1, 1], soft[2, 2], soft[0, 1], soft[0, 2], soft[1, 2]]
    start = np.concatenate([hard, truth])
    fit = least_squares(off, start, method="lm", xtol=1e-15, ftol=1e-15, gtol=1e-15)
    return {
        "readings": readings.ravel().tolist(),
        "centre": fit.x[:3].tolist(),
        "matrix": symmetric(fit.x[3:]).ravel().tolist(),
        "residual": float(np.sqrt(np.mean(fit.fun**2))),
    }


table = {
    "made with": {"scipy": scipy.__version__, "numpy": np.__version__},
    "field": FIELD,
    "cases": [case(share) for share in (1.0, 0.8, 0.6)],
}
with open("ellipsoid.json", "w") as file:
    json.dump(table, file)
    file.write("\n")
