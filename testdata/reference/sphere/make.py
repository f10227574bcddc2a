#!/usr/bin/env python3
"""Writes poles.csv, cases.csv and paths.csv: what scipy's spherical Bessel
functions make of a rigid sphere, and of whole paths from loudspeaker to capsule.

    make.py [folder]      (default: the folder of this file)

Needs numpy and scipy. Time factor e^{+jwt}; a source gives e^{-jkR}/R.
"""
import csv
import itertools
import os
import sys

import numpy as np
from scipy.special import eval_legendre, spherical_jn, spherical_yn

SPEED = 344.0  # m/s
REFERENCE = 0.03  # m, of the level
STANDS_AT = (0.37, 0.46, 0.48)  # the loudspeaker, parts of the room's sides
IMAGE_ORDER = 4
FREQUENCIES = (20, 50, 100, 250, 500, 1000, 2000, 4000, 8000, 12000, 16000, 20000, 23000)

#  form, body, rear, gradient fraction, spacing, source radius, distance, room's sides and reflection factor
CASES = (
    ("phase-shift", "sphere", "delay", 0.5, 0.027, 0.017, 0.036, (0, 0, 0), 0),
    ("phase-shift", "sphere", "delay", 0.5, 0.027, 0.017, 0.356, (5, 4, 2.7), 0.5),
    ("phase-shift", "sphere", "low-pass", 0.3, 0.036, 0.017, 0.1, (4, 3, 2.5), 0.8),
    ("summed", "sphere", "delay", 1, 0.027, 0.03, 0.026, (0, 0, 0), 0),
    ("summed", "sphere", "delay", 0.4, 0.3, 0.1, 0.25, (6, 5, 3), 0.7),
    ("summed", "open", "delay", 0.7, 0.02, 0.01, 0.056, (4, 3, 2.5), 0.8),
    ("phase-shift", "open", "delay", 0.25, 0.015, 0, 0.05, (5, 4, 2.7), 0.3),
    ("phase-shift", "open", "delay", 0.02, 0.1, 0.2, 0.2, (0, 0, 0), 0),
    ("phase-shift", "open", "low-pass", 0.63, 0.024, 0.017, 0.0125, (0, 0, 0), 0),
)


def write(folder, name, header, rows):
    with open(os.path.join(folder, name), "w", newline="") as f:
        w = csv.writer(f, lineterminator="\n")
        w.writerow(header)
        w.writerows([v if isinstance(v, (int, str)) else f"{v:.12g}" for v in row] for row in rows)


def on_sphere(k, a, along, aside):
    """Pressure at both poles of a sphere of radius a; arrays of sources at
    (along, aside) from its centre, the axis towards the front pole."""
    R = np.hypot(along, aside)
    # Terms fall as (a/R)^m once m > ka.
    m = np.arange(int(1.3 * k * a + 15 + np.log(1e-15) / np.log(a / np.min(R))))

    def hankel(x, derivative=False):
        return spherical_jn(m, x, derivative) + 1j * spherical_yn(m, x, derivative)

    weights = (2 * m + 1) / hankel(k * a, True)
    out = []
    for side in (1, -1):
        p = [np.sum(weights * hankel(k * d) * eval_legendre(m, side * x / d)) for x, d in zip(along, R)]
        out.append(np.conj(-np.array(p) / (k * a * a)))
    assert np.all(np.isfinite(out)), (k, a, along)
    return out


def on_points(k, d, along, aside):
    """Pressure in free air at the ports and in the middle between them."""
    out = []
    for ahead in (d / 2, -d / 2, 0):
        R = np.hypot(along - ahead, aside)
        out.append(np.exp(-1j * k * R) / R)
    return out


def piston(radius):
    """Radii and weights of 80 rings, by Gauss-Legendre in the radius."""
    if radius == 0:
        return np.array([0.0]), np.array([1.0])
    x, w = np.polynomial.legendre.leggauss(80)
    rho = radius * (x + 1) / 2
    return rho, 2 / radius**2 * rho * w * radius / 2


def images(room, reflection, distance):
    """Places as the capsule sees them (it looks along -x), and strengths: image n
    along a side L stands at nL + s, or for odd n at nL + L - s, after |n| reflections."""
    source = [part * side for part, side in zip(STANDS_AT, room)]
    microphone = [source[0] + distance, source[1], source[2]]
    for n in itertools.product(range(-IMAGE_ORDER, IMAGE_ORDER + 1), repeat=3):
        order = sum(abs(i) for i in n)
        if not 0 < order <= IMAGE_ORDER:
            continue
        at = [i * side + (s if i % 2 == 0 else side - s) for i, side, s in zip(n, room, source)]
        delta = [p - q for p, q in zip(at, microphone)]
        yield -delta[0], np.hypot(delta[1], delta[2]), reflection**order


def path(f, form, body, rear, beta, d, radius, distance, room, reflection):
    """From excitation to output, without the filters and for a sensitivity of 1."""
    k = 2 * np.pi * f / SPEED
    aside, weight = piston(radius)
    along = np.full(len(aside), distance)
    if reflection:
        more = np.array(list(images(room, reflection, distance)))
        along, aside, weight = np.r_[along, more[:, 0]], np.r_[aside, more[:, 1]], np.r_[weight, more[:, 2]]
    if body == "sphere":
        front, back = (np.sum(weight * p) for p in on_sphere(k, d / 3, along, aside))
        centre = (front + back) / 2
    else:
        front, back, centre = (np.sum(weight * p) for p in on_points(k, d, along, aside))
    if form == "summed":
        out = (1 - beta) * centre + beta * (front - back) / (1j * k * d)
    else:
        w, tau = 2 * np.pi * f, d / SPEED * (1 - beta) / beta
        network = np.exp(-1j * w * tau) if rear == "delay" else 1 / (1 + 1j * w * tau)
        out = (front - back * network) / (1j * w * (d / SPEED + tau))
    return REFERENCE * out


def poles():
    for ka, at, degrees in itertools.product((0.02, 0.3, 1, 3, 10, 30), (1.3, 2, 8, 100), (0, 30, 90, 150, 180)):
        a = 0.009
        if at < 2 and ka < 3:
            continue  # scipy's y_m overflows
        along, aside = at * a * np.cos(np.radians(degrees)), at * a * np.sin(np.radians(degrees))
        front, rear = on_sphere(ka / a, a, np.array([along]), np.array([aside]))
        yield ka, at, degrees, front[0].real, front[0].imag, rear[0].real, rear[0].imag


def main():
    folder = sys.argv[1] if len(sys.argv) > 1 else os.path.dirname(os.path.abspath(__file__))
    write(folder, "poles.csv",
          ["ka", "distance_over_a", "angle_deg", "front_re", "front_im", "rear_re", "rear_im"], poles())
    write(folder, "cases.csv",
          ["case", "form", "body", "rear", "gradient_fraction", "port_spacing_m", "source_radius_m", "distance_m",
           "length_m", "width_m", "height_m", "reflection"],
          [(i, *c[:7], *(float(side) for side in c[7]), float(c[8])) for i, c in enumerate(CASES)])
    write(folder, "paths.csv", ["case", "frequency_hz", "re", "im"],
          [(i, f, h.real, h.imag) for i, c in enumerate(CASES) for f in FREQUENCIES for h in [path(f, *c)]])


main()
