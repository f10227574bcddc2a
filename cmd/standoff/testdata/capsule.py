"""Impulse responses of a cardioid on a rigid sphere, for sox's fir effect.

Nothing of the program under test: the pressure on the sphere is the series of
Duda & Martens, J. Acoust. Soc. Am. 104, 3048 (1998) with scipy's spherical Bessel
functions, the source a piston as a sum of monopoles.

usage: capsule.py FOLDER RATE TAPS BETA SPACING_M RADIUS_M SPEED LABEL=METRES ...
writes FOLDER/LABEL.txt, one coefficient a line.
"""
import sys

import numpy as np
from scipy.special import eval_legendre, spherical_jn, spherical_yn


def hankel(m, x, derivative=False):
    return spherical_jn(m, x, derivative) + 1j * spherical_yn(m, x, derivative)


def poles(k, a, r, rho):
    """Pressures at the poles for e^{+jwt}; the sum ends after two small terms."""
    R = np.hypot(r, rho)
    front, rear, small, m = 0j, 0j, 0, 0
    while small < 2 and m < 80:
        ratio = hankel(m, k * R) / hankel(m, k * a, True)
        if not np.isfinite(ratio):
            break
        t = (2 * m + 1) * ratio
        p = t * eval_legendre(m, r / R)
        front, rear = front + p, rear + p * (-1) ** m
        small = small + 1 if abs(p) < 1e-13 * abs(front) else 0
        m += 1
    return -np.conj(front) / (k * a * a), -np.conj(rear) / (k * a * a)


def output(k, beta, d, b, r):
    """Phase-shift capsule, rear delay, in front of a piston of radius b."""
    a, tau = d / 3, d * (1 - beta) / beta  # tau times c
    edges = np.linspace(0, 1, 9)
    u = (edges[1:] + edges[:-1]) / 2  # equal areas
    f, q = np.mean([poles(k, a, r, b * np.sqrt(x)) for x in u], axis=0)
    return (f - q * np.exp(-1j * k * tau)) / (1j * k * (d + tau))


def main():
    folder, rate, taps = sys.argv[1], int(sys.argv[2]), int(sys.argv[3])
    beta, d, b, c = map(float, sys.argv[4:8])
    for arg in sys.argv[8:]:
        label, r = arg.split("=")
        # A grid that is fine where the rise is, to be interpolated.
        knots = np.geomspace(1, rate / 2, 500)
        k = 2 * np.pi * knots / c
        slow = np.array([output(x, beta, d, b, float(r)) for x in k]) * np.exp(1j * k * float(r))
        f = np.fft.rfftfreq(taps, 1 / rate)[1:]
        at = np.log(f)
        h = np.interp(at, np.log(knots), slow.real) + 1j * np.interp(at, np.log(knots), slow.imag)
        s = 1j * f / 70
        h *= s * s / (s * s + np.sqrt(2) * s + 1)  # a small loudspeaker
        s = 1j * f / 15000
        h *= 1 / (s * s + np.sqrt(2) * s + 1)
        h *= 0.02 * np.exp(-2j * np.pi * f * (float(r) / c + 0.01))
        x = np.fft.irfft(np.concatenate(([0], h)), taps)
        np.savetxt(f"{folder}/{label}.txt", x, fmt="%.12e")


main()
