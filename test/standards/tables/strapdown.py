"""Writes strapdown.json: orientation under a known varying angular rate, and a low-pass response, as SciPy computes them.

Run from this folder: python3 strapdown.py
Stored table made with Python 3.11.7, SciPy 1.17.1, NumPy 2.4.6 (also recorded in the table itself).

Orientation: q' = q (0, w) / 2 for body-axes rates w(t), solved by scipy.integrate.solve_ivp (DOP853, tolerances 1e-13).
The readings are the mean rates over each interval, by scipy.integrate.quad. Quaternions are scalar first.
Low-pass: scipy.signal.butter(2, sqrt(2) / tau, analog), its response to the ramp u(t) = t by scipy.signal.lsim in steps
of 10 us.
"""

import json
import platform

import numpy as np
import scipy
from scipy.integrate import quad, solve_ivp
from scipy.signal import butter, lsim

RATE_HZ = 200.0
SECONDS = 2.0


def rate(t):
    """A fast tailbeat with roll: rad/s."""
    return np.array(
        [
            1.5 * np.sin(2 * np.pi * 2.0 * t + 0.4),
            0.8 * np.cos(2 * np.pi * 3.0 * t),
            6.0 * np.cos(2 * np.pi * 2.0 * t) + 0.5,
        ]
    )


def derivative(t, q):
    w, x, y, z = q
    a, b, c = rate(t)
    return 0.5 * np.array(
        [-x * a - y * b - z * c, w * a + y * c - z * b, w * b - x * c + z * a, w * c + x * b - y * a]
    )


steps = int(RATE_HZ * SECONDS)
times = np.arange(steps + 1) / RATE_HZ
solution = solve_ivp(
    derivative, (0, SECONDS), [1, 0, 0, 0], method="DOP853", t_eval=times, rtol=1e-13, atol=1e-13
)
means = [
    [quad(lambda t, i=i: rate(t)[i], a, b, epsabs=1e-14)[0] * RATE_HZ for i in range(3)]
    for a, b in zip(times[:-1], times[1:])
]

tau = 0.5
numerator, denominator = butter(2, np.sqrt(2) / tau, analog=True)
fine = np.linspace(0, 3, 300001)
_, ramp, _ = lsim((numerator, denominator), fine, fine)

with open("strapdown.json", "w") as file:
    json.dump(
        {
            "made_with": {
                "script": "strapdown.py",
                "python": platform.python_version(),
                "scipy": scipy.__version__,
                "numpy": np.__version__,
            },
            "rate_hz": RATE_HZ,
            "start_rate": rate(0.0).tolist(),
            "mean_rates": np.round(means, 13).tolist(),
            "orientations_every_20": solution.y.T[::20].tolist(),
            "low_pass": {"tau_s": tau, "ramp_every_s": 0.1, "response": ramp[::10000].tolist()},
        },
        file,
        indent=1,
    )
    file.write("\n")
