#!/usr/bin/env python3
"""Writes data.csv and optimum.csv: curve fits solved by scipy.optimize.least_squares.

    make.py [folder]      (default: the folder of this file)

Needs numpy and scipy. The observations are synthetic, with a fixed seed.
"""
import csv
import os
import sys

import numpy as np
from scipy.optimize import least_squares

INF = np.inf


def decay(b, t):
    return b[0] * np.exp(-b[1] * t) + b[2] * np.exp(-b[3] * t) + b[4]


def peak(b, f):
    return b[0] * np.exp(-((f - b[1]) / b[2]) ** 2) + b[3] + b[4] * f


def resonance(b, f):
    """Level in dB of a second-order resonance: gain, frequency, Q."""
    u = f / b[1]
    return b[0] - 10 * np.log10((1 - u**2) ** 2 + (u / b[2]) ** 2)


def logistic(b, x):
    return b[0] / (1 + np.exp(-b[1] * (x - b[2])))


# name: model, predictor, truth, sigma, start, lower, upper
FITS = {
    "decay": (decay, np.linspace(0, 8, 60), [3, 1.5, 1, 0.3, 0.2], 0.01,
              [1, 3, 1, 0.1, 0], [-INF] * 5, [INF] * 5),
    "decay-bounded": (decay, np.linspace(0, 8, 60), [3, 1.5, 1, 0.3, -0.1], 0.01,
                      [1, 3, 1, 0.1, 0.5], [0] * 5, [INF, INF, INF, 1, 1]),
    "peak": (peak, np.linspace(400, 500, 81), [5, 452, 9, 1, 0.002], 0.05,
             [2, 440, 20, 0, 0], [-INF] * 5, [INF] * 5),
    "peak-bounded": (peak, np.linspace(400, 500, 81), [5, 452, 9, 1, 0.002], 0.05,
                     [2, 445, 6, 0.5, 0], [0, 400, 1, -INF, -INF], [INF, 450, 8, INF, INF]),
    "resonance": (resonance, np.geomspace(20, 2000, 70), [-12, 180, 2.5], 0.3,
                  [0, 100, 1], [-60, 20, 0.1], [60, 2000, 50]),
    "logistic": (logistic, np.linspace(-5, 9, 40), [120, 0.9, 2], 1.5,
                 [80, 0.3, 0], [-INF] * 3, [INF] * 3),
}


def observe(name, rng):
    model, x, truth, sigma, *_ = FITS[name]
    y = model(np.array(truth), x) + sigma * rng.standard_normal(len(x))
    # what is fitted is what is written: nine digits
    return np.array([float(f"{v:.9g}") for v in x]), np.array([float(f"{v:.9g}") for v in y])


def solve(name, x, y):
    model, _, _, sigma, start, lower, upper = FITS[name]
    bounded = np.isfinite(lower).any() or np.isfinite(upper).any()
    r = least_squares(lambda b: (model(b, x) - y) / sigma, start, jac="3-point",
                      method="dogbox" if bounded else "trf", bounds=(lower, upper),
                      x_scale="jac",
                      ftol=1e-15, xtol=1e-15, gtol=1e-15, max_nfev=20000)
    free = r.active_mask == 0
    sd = np.zeros(len(start))
    sd[free] = np.sqrt(np.diag(np.linalg.inv(r.jac[:, free].T @ r.jac[:, free])))
    return r, sd


def main(folder):
    rng = np.random.default_rng(20)
    with open(os.path.join(folder, "data.csv"), "w", newline="") as f, \
         open(os.path.join(folder, "optimum.csv"), "w", newline="") as g:
        data, best = csv.writer(f, lineterminator="\n"), csv.writer(g, lineterminator="\n")
        data.writerow(["fit", "x", "y", "sigma"])
        best.writerow(["fit", "start", "lower", "upper", "value", "sd", "at_bound", "cost"])
        for name, (_, _, _, sigma, start, lower, upper) in FITS.items():
            x, y = observe(name, rng)
            data.writerows([name, f"{a:.9g}", f"{b:.9g}", sigma] for a, b in zip(x, y))
            r, sd = solve(name, x, y)
            best.writerows([name, start[j], lower[j], upper[j], f"{r.x[j]:.9g}", f"{sd[j]:.6g}",
                            int(r.active_mask[j]), f"{r.cost:.10g}"] for j in range(len(start)))


if __name__ == "__main__":
    main(sys.argv[1] if len(sys.argv) > 1 else os.path.dirname(os.path.abspath(__file__)))
