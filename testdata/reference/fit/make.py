#!/usr/bin/env python3
"""Writes set.csv, data.csv and optimum.csv: joint fits of capsule
models at several distances, solved by scipy.optimize.least_squares.

    make.py [folder]      (default: the folder of this file)

Needs numpy and scipy. The models are written from the physics (time factor
e^{+jwt}, SI), the problem with every unknown explicit: the far response S, two
numbers at each frequency, beside mix, spacing, setback, source radius, speed of
sound, tape errors and, with a free clock, delays.
"""
import csv
import functools
import os
import sys

import numpy as np
from scipy.optimize import least_squares
from scipy.special import eval_legendre, spherical_jn, spherical_yn

NOMINAL = [0.027, 0.04, 0.065, 0.11, 0.2, 0.45]
TAPE, SETBACK, RADIUS, SPEED = 0.0005, (0.006, 0.001), (0.016, 0.001), (343.9, 0.6)
HZ = np.array([float(f"{f:.6g}") for f in np.geomspace(80, 5000, 24)])

RINGS = 8   # of monopoles on a piston
NODES, WEIGHTS = np.polynomial.legendre.leggauss(RINGS)
TERMS = 24  # of the sphere's series: (a/R)^24 < 1e-13 here


def rings(b):
    """A baffled piston as rings of monopoles: Gauss-Legendre in the ring's area."""
    if b == 0:
        return np.array([0.0]), np.array([1.0])
    return b * np.sqrt((NODES + 1) / 2), WEIGHTS / 2


def free_field(k, x, b):
    """Pressure on the axis at x, [frequency]: the sum of e^{-jkR}/R."""
    rho, w = rings(b)
    R = np.sqrt(x**2 + rho**2)
    return (np.exp(-1j * np.outer(k, R)) / R) @ w


def hankel(m, x, derivative=False):
    return spherical_jn(m, x, derivative) + 1j * spherical_yn(m, x, derivative)


@functools.lru_cache(maxsize=200)
def incident(c, r, b):
    """(2m+1) h_m(kR) P_m(cos) summed over the rings, [m, frequency]: all of the
    sphere's series that does not depend on the sphere."""
    rho, w = rings(b)
    R = np.sqrt(r**2 + rho**2)
    m = np.arange(TERMS)[:, None, None]
    x = (2 * np.pi * HZ / c)[:, None] * R
    return (2 * m + 1) * hankel(m, x[None]) * eval_legendre(m, (r / R)[None, None]) @ w


@functools.lru_cache(maxsize=50)
def scattered(c, a):
    """h'_m(ka), [m, frequency]."""
    return hankel(np.arange(TERMS)[:, None], (2 * np.pi * HZ / c * a)[None], True)


def poles(c, r, b, a):
    """Pressure at both poles of a rigid sphere, centre at r on the axis:
    p = conj[-1/(k a^2) sum (2m+1) h_m(kR)/h'_m(ka) P_m(+-cos)]."""
    k = 2 * np.pi * HZ / c
    m = np.arange(TERMS)[:, None]
    term = incident(c, r, b) / scattered(c, a)
    front, rear = -np.sum(term, axis=0) / (k * a**2), -np.sum(term * (-1.0) ** m, axis=0) / (k * a**2)
    return np.conj(front), np.conj(rear)


def capsule(form, body, c, r, beta, d, b):
    """Output of the capsule at r for a source of e^{-jkr}/r far away."""
    k = 2 * np.pi * HZ / c
    if body == "sphere":
        front, rear = poles(c, r, b, d / 3)
        centre = (front + rear) / 2
    else:
        front, rear, centre = free_field(k, r - d / 2, b), free_field(k, r + d / 2, b), free_field(k, r, b)
    if form == "summed":
        return (1 - beta) * centre + beta * (front - rear) / (1j * k * d)
    inner = d * (1 - beta) / beta  # internal path c*tau
    return (front - rear * np.exp(-1j * k * inner)) / (1j * k * (d + inner))


# name: form, body, source, free clock, mix, spacing m, true noise over declared
SETS = {
    "summed-open-point": ("summed", "open", "point", False, 0.5, 0.022, 1.0),
    "phase-shift-open-piston": ("phase-shift", "open", "piston", False, 0.63, 0.020, 0.9),
    "pressure-like": ("summed", "open", "piston", False, 0.15, 0.024, 1.0),
    "summed-sphere-piston": ("summed", "sphere", "piston", False, 0.75, 0.027, 1.0),
    "phase-shift-sphere-piston": ("phase-shift", "sphere", "piston", False, 0.5, 0.025, 2.0),
    "free-clock": ("phase-shift", "sphere", "piston", True, 0.5, 0.027, 1.0),
}

class Set:
    """One data set and its least-squares problem."""

    def __init__(self, name, rng):
        self.name = name
        self.form, self.body, self.source, self.free, self.beta, self.d, self.noise = SETS[name]
        self.radius = RADIUS if self.source == "piston" else (0.0, 1.0)
        self.n = len(NOMINAL)
        self.observe(rng)

    def observe(self, rng):
        setback, c = SETBACK[0] + SETBACK[1] * rng.standard_normal(), SPEED[0] + SPEED[1] * rng.standard_normal()
        b = self.radius[0] + (self.radius[1] * rng.standard_normal() if self.source == "piston" else 0)
        far = (1 + 1j * HZ / 90) ** -1 * (1j * HZ / 90) / (1 + 1j * HZ / 9000) * np.exp(-2j * np.pi * HZ * 3e-4)
        self.y, self.variance = [], []
        for r in NOMINAL:
            tape = TAPE * rng.standard_normal()
            late = 2e-4 * rng.standard_normal() if self.free else 0.0
            clean = far * capsule(self.form, self.body, c, r + setback + tape, self.beta, self.d, b)
            clean = clean * np.exp(-2j * np.pi * HZ * late)
            sigma = 0.01 * np.abs(clean)
            noise = (rng.standard_normal(len(HZ)) + 1j * rng.standard_normal(len(HZ))) * sigma / np.sqrt(2)
            y = clean + self.noise * noise
            self.y.append([complex(float(f"{v.real:.9g}"), float(f"{v.imag:.9g}")) for v in y])
            self.variance.append([float(f"{v**2:.9g}") for v in sigma])
        self.y, self.variance = np.array(self.y), np.array(self.variance)

    def start(self):
        x = np.zeros(5 + self.n + (self.n - 1 if self.free else 0))
        x[:5] = self.beta, self.d, SETBACK[0], self.radius[0], SPEED[0]
        for i in range(1, self.n) if self.free else []:
            # the best of a comb of delays, against the first response
            h = [capsule(self.form, self.body, SPEED[0], NOMINAL[j] + SETBACK[0], self.beta, self.d, self.radius[0]) for j in (0, i)]
            z = self.y[i] * np.conj(self.y[0] * h[1]) * h[0]
            z = z / np.abs(z)
            comb = np.linspace(-2e-3, 2e-3, 2001)
            x[4 + self.n + i] = comb[np.argmax((np.exp(2j * np.pi * np.outer(comb, HZ)) @ z).real)]
        h = np.array([self.output(i, x) for i in range(self.n)])
        s = np.sum(np.conj(h) * self.y / self.variance, 0) / np.sum(np.abs(h) ** 2 / self.variance, 0)
        return np.concatenate([x, s.real, s.imag])

    def output(self, i, x):
        beta, d, setback, b, c = x[:5]
        b = b if self.source == "piston" else 0.0
        h = capsule(self.form, self.body, c, NOMINAL[i] + setback + x[5 + i], beta, d, b)
        if self.free and i > 0:
            h = h * np.exp(-2j * np.pi * HZ * x[4 + self.n + i])
        return h

    def split(self, x):
        m = len(HZ)
        return x[: -2 * m], x[-2 * m: -m] + 1j * x[-m:]

    def residuals(self, x, variance):
        p, s = self.split(x)
        data = [(self.y[i] - self.output(i, p) * s) / np.sqrt(variance[i] / 2) for i in range(self.n)]
        data = np.concatenate([np.concatenate([r.real, r.imag]) for r in data])
        priors = [(p[2] - SETBACK[0]) / SETBACK[1], (p[3] - self.radius[0]) / self.radius[1], (p[4] - SPEED[0]) / SPEED[1]]
        return np.concatenate([data, priors, p[5: 5 + self.n] / TAPE])

    def jacobian(self, x, variance):
        """The far response's columns as they are, the others by central differences."""
        p, s = self.split(x)
        m, np_ = len(HZ), len(p)
        out = np.zeros((2 * m * self.n + 3 + self.n, len(x)))
        steps = [1e-5, 1e-6, 2e-6, 2e-6, 1e-3] + [2e-6] * self.n + [1e-8] * (np_ - 5 - self.n)
        for i in range(self.n):
            at = 2 * m * i
            w = np.sqrt(variance[i] / 2)
            h = self.output(i, p) / w
            own = [0, 1, 2, 3, 4] + ([4 + self.n + i] if self.free and i > 0 else [])
            for j in own:
                q, r = p.copy(), p.copy()
                q[j] += steps[j]
                r[j] -= steps[j]
                dh = -(self.output(i, q) - self.output(i, r)) / (2 * steps[j]) / w * s
                for column in [j] + ([5 + i] if j == 2 else []):  # a tape error moves one point as the setback moves all
                    out[at: at + m, column], out[at + m: at + 2 * m, column] = dh.real, dh.imag
            rows, cols = np.arange(m), np_ + np.arange(m)
            out[at + rows, cols], out[at + rows, cols + m] = -h.real, h.imag
            out[at + m + rows, cols], out[at + m + rows, cols + m] = -h.imag, -h.real
        at = 2 * m * self.n
        out[at, 2], out[at + 1, 3], out[at + 2, 4] = 1 / SETBACK[1], 1 / self.radius[1], 1 / SPEED[1]
        for i in range(self.n):
            out[at + 3 + i, 5 + i] = 1 / TAPE
        return out

    def solve(self, x, variance):
        return least_squares(self.residuals, x, self.jacobian, method="lm", x_scale="jac",
                             ftol=1e-13, xtol=1e-11, gtol=1e-14, args=(variance,))

    def optimum(self):
        """Solution, its covariance and the chi-square of the data. Where that is
        more than the degrees of freedom, the covariance is of the problem with
        the data's variance raised to match."""
        m = len(HZ)
        r = self.solve(self.start(), self.variance)
        chi = float(np.sum(r.fun[: 2 * m * self.n] ** 2))
        freedom = 2 * m * self.n - 2 * m - 2
        raised = self.solve(r.x, self.variance * max(chi / freedom, 1))
        cov = np.linalg.inv(raised.jac.T @ raised.jac)
        return r, cov, chi, freedom


def write(folder, name, header, rows):
    with open(os.path.join(folder, name), "w", newline="") as f:
        w = csv.writer(f, lineterminator="\n")
        w.writerow(header)
        w.writerows([f"{v:.9g}" if isinstance(v, float) else v for v in row] for row in rows)


def main(folder):
    sets, data, best = [], [], []
    for number, name in enumerate(SETS):
        s = Set(name, np.random.default_rng(100 + number))
        r, cov, chi, freedom = s.optimum()
        p, _ = s.split(r.x)
        se = np.sqrt(np.diag(cov))
        sets.append([name, s.form, s.body, s.source, int(s.free), *SETBACK, *s.radius, *SPEED, TAPE, chi, freedom, float(r.cost)])
        names = ["beta", "spacing", "setback", "radius", "speed"]
        best += [[name, q, float(p[j]), float(se[j])] for j, q in enumerate(names)]
        for i in range(s.n):
            where = cov[2, 2] + cov[5 + i, 5 + i] + 2 * cov[2, 5 + i]
            best.append([name, f"distance-{i}", float(NOMINAL[i] + p[2] + p[5 + i]), float(np.sqrt(where))])
            data += [[name, NOMINAL[i], float(f), float(v.real), float(v.imag), float(q)]
                     for f, v, q in zip(HZ, s.y[i], s.variance[i])]
        for i in range(1, s.n) if s.free else []:
            j = 4 + s.n + i
            best.append([name, f"delay-{i}", float(p[j]), float(se[j])])
    write(folder, "set.csv", ["set", "form", "body", "source", "free_clock", "setback_m", "setback_u_m", "radius_m", "radius_u_m",
                              "speed_m_s", "speed_u_m_s", "tape_u_m", "chi_square", "freedom", "cost"], sets)
    write(folder, "data.csv", ["set", "nominal_m", "hz", "re", "im", "variance"], data)
    write(folder, "optimum.csv", ["set", "parameter", "value", "standard_error"], best)


if __name__ == "__main__":
    main(sys.argv[1] if len(sys.argv) > 1 else os.path.dirname(os.path.abspath(__file__)))
