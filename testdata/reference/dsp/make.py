#!/usr/bin/env python3
"""Writes signal.csv, dtft.csv, welch.csv, envelope.csv, windows.csv, band.csv and
resampled.csv: what scipy.signal makes of seeded signals.

    make.py [folder]      (default: the folder of this file)

Needs numpy and scipy.
"""
import csv
import os
import sys

import numpy as np
from scipy import signal

RATE = 8000.0
ORIGIN = 37.25  # samples
BAND = (600.0, 1500.0)  # Hz, of the envelope
SEGMENTS = (64, 250, 512)
RATIOS = ((160, 147), (2, 1), (5001, 5000), (4999, 5000))  # new rate to old


def write(folder, name, header, rows):
    with open(os.path.join(folder, name), "w", newline="") as f:
        w = csv.writer(f, lineterminator="\n")
        w.writerow(header)
        w.writerows([v if isinstance(v, (int, str)) else f"{v:.12g}" for v in row] for row in rows)


def observe():
    """A tone with a decay, coloured noise and an offset."""
    rng = np.random.default_rng(31)
    n = np.arange(1500)
    x = signal.lfilter([1, 0.6], [1, -0.5], 0.2 * rng.standard_normal(len(n)))
    x += np.exp(-n / 400) * np.sin(2 * np.pi * 1000.3 * n / RATE) + 0.3
    return np.array([float(f"{v:.9g}") for v in x])  # what is used is what is written


def smooth_step(f, zero, one):
    """The step of the program's documentation, in log f."""
    x = np.log(np.maximum(f, 1e-9) / zero) / np.log(one / zero)
    out = (x >= 1).astype(float)
    inside = (x > 0) & (x < 1)
    a, b = np.exp(-1 / x[inside]), np.exp(-1 / (1 - x[inside]))
    out[inside] = a / (a + b)
    return out


def envelope(x):
    """Band-pass without phase, then the magnitude of the analytic signal."""
    n = 3000  # twice the length, as good as no wrapping
    f = np.arange(n // 2 + 1) * RATE / n
    edge = 2 ** (1 / 3)
    pass_band = smooth_step(f, BAND[0] / edge, BAND[0]) * smooth_step(f, BAND[1] * edge, BAND[1])
    y = np.fft.irfft(np.fft.rfft(x, n) * pass_band, n)
    return np.abs(signal.hilbert(y))[: len(x)]


def band_limited(n):
    """Noise without anything above 0.44 of the rate, silent at both ends."""
    rng = np.random.default_rng(53)
    taps = signal.firwin(401, 0.84, window=("kaiser", 10.0))  # of the Nyquist frequency
    x = np.convolve(rng.standard_normal(n - 800), taps)
    return np.array([float(f"{v:.9g}") for v in np.pad(x, 200)])


def resample(x, up, down):
    """resample_poly with a filter ten times as steep as its own."""
    rate = max(up, down)
    taps = signal.firwin(2 * 200 * rate + 1, 1 / rate, window=("kaiser", 12.0))
    return signal.resample_poly(x, up, down, window=taps)


def main(folder):
    x = observe()
    write(folder, "signal.csv", ["x"], ([v] for v in x))

    hz = [0.0, 3.7, 50.0, 333.3, 1000.3, 2222.2, 3999.0, 4000.0]
    w = 2 * np.pi * np.array(hz) / RATE
    _, z = signal.freqz(x, worN=w)
    z = z * np.exp(1j * w * ORIGIN)
    write(folder, "dtft.csv", ["hz", "re", "im"], ((f, v.real, v.imag) for f, v in zip(hz, z)))

    rows = []
    for segment in SEGMENTS:
        # with fs = 1 and both sides the density is per sample
        f, p = signal.welch(x - x.mean(), fs=1.0, window="hann", nperseg=segment, noverlap=segment // 2,
                            detrend=False, return_onesided=False, scaling="density")
        rows += [(segment, f[i] * RATE, p[i]) for i in range(1, segment // 2)]
    write(folder, "welch.csv", ["segment", "hz", "density"], rows)

    write(folder, "envelope.csv", ["envelope"], ([v] for v in envelope(x)))

    rows = [("hann", 48, 0, i, v) for i, v in enumerate(signal.windows.hann(48, sym=False))]
    rise, flat, fall = 7, 9, 16
    up, down = signal.windows.cosine(2 * rise) ** 2, signal.windows.cosine(2 * fall) ** 2
    gate = np.concatenate([up[:rise], np.ones(flat), down[fall:]])
    rows += [("gate", rise, fall, i, v) for i, v in enumerate(gate)]
    write(folder, "windows.csv", ["window", "first", "second", "sample", "value"], rows)

    x = band_limited(1600)
    write(folder, "band.csv", ["x"], ([v] for v in x))
    rows = []
    for up, down in RATIOS:
        y = resample(x, up, down)
        rows += [(up, down, i, round(y[i], 9) + 0.0) for i in range(0, len(y), 3)]
    write(folder, "resampled.csv", ["up", "down", "sample", "value"], rows)


if __name__ == "__main__":
    main(sys.argv[1] if len(sys.argv) > 1 else os.path.dirname(os.path.abspath(__file__)))
