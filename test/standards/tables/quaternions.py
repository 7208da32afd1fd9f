"""Writes quaternions.json: quaternion algebra and slerp as SciPy computes them.

Run from this folder: python3 quaternions.py
Stored table made with Python 3.11.7, SciPy 1.17.1, NumPy 2.4.6 (also recorded in the table itself).
Quaternions are scalar first; rotation vectors in radians.
"""

import json
import platform

import numpy as np
import scipy
from scipy.spatial.transform import Rotation, Slerp

rng = np.random.default_rng(20260601)


def quat(rotation):
    return rotation.as_quat(scalar_first=True).tolist()


def pair():
    a, b = Rotation.random(2, rng=rng)
    v = rng.normal(size=3) * 10
    return {
        "a": quat(a),
        "b": quat(b),
        "vector": v.tolist(),
        "product": quat(a * b),
        "inverse": quat(a.inv()),
        "rotated": a.apply(v).tolist(),
        "matrix": a.as_matrix().ravel().tolist(),
        "logA": a.as_rotvec().tolist(),
    }


def exponential(length):
    direction = rng.normal(size=3)
    vector = direction / np.linalg.norm(direction) * length
    return {"vector": vector.tolist(), "quaternion": quat(Rotation.from_rotvec(vector))}


def interpolation(a, b):
    shares = [0.0, 0.1, 0.25, 0.5, 0.9, 1.0]
    between = Slerp([0.0, 1.0], Rotation.concatenate([a, b]))(shares)
    return {"a": quat(a), "b": quat(b), "shares": shares, "between": [quat(q) for q in between]}


pairs = [pair() for _ in range(40)]
lengths = [0.0, 1e-12, 1e-8, 1e-4, 0.01, 0.1, 0.19, 0.2, 0.21, 0.5, 1.0, 2.0, 3.0, 3.14159, 5.0]
slerps = [interpolation(*Rotation.random(2, rng=rng)) for _ in range(20)]
for small in (1e-10, 1e-6, 1e-3):
    start = Rotation.random(rng=rng)
    slerps.append(interpolation(start, start * Rotation.from_rotvec([small, -small, small / 2])))

with open("quaternions.json", "w") as file:
    json.dump(
        {
            "made_with": {
                "script": "quaternions.py",
                "python": platform.python_version(),
                "scipy": scipy.__version__,
                "numpy": np.__version__,
            },
            "pairs": pairs,
            "exponentials": [exponential(length) for length in lengths],
            "slerps": slerps,
        },
        file,
        indent=1,
    )
    file.write("\n")
