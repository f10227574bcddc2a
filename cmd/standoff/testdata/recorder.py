"""What a recorder with a clock of its own brings home of a take.

Nothing of the program under test: the sound is read between its samples by sixteen
times oversampling with numpy's transform and scipy's cubic spline, laid somewhere
into a long recording of something else, and rounded to 16 bits.

usage: recorder.py IN.wav OUT.wav RATE PPM START_S TOTAL_S CLUTTER LEVEL_RMS SEED [CUT_BEGIN_S CUT_END_S]
CLUTTER is noise, speech or music; it ends 0.2 s before the take and goes on 0.5 s
after it. PPM is by how much the recorder's clock is fast.
"""
import sys

import numpy as np
from scipy.interpolate import CubicSpline
from scipy.io import wavfile
from scipy.signal import butter, sosfilt


def between(x, rate, new_rate, ppm):
    """x at the times n/(new_rate·(1+ppm))."""
    over, pad = 16, 4096
    n = len(x) + 2 * pad
    spectrum = np.fft.rfft(np.pad(x, pad), n)
    if new_rate < rate:  # a converter's filter
        f = np.fft.rfftfreq(n, 1 / rate)
        spectrum *= np.clip((0.499 * new_rate - f) / (0.04 * new_rate), 0, 1)
    fine = np.fft.irfft(spectrum, n * over) * over
    true = new_rate * (1 + ppm * 1e-6)
    t = np.arange(int(len(x) * true / rate)) / true * rate
    return CubicSpline(np.arange(len(fine)), fine)((t + pad) * over)


def clutter(kind, n, rate, rng):
    t = np.arange(n) / rate
    x = rng.standard_normal(n)
    if kind == "speech":
        # A buzz and hiss through three formants that move, in syllables.
        buzz = np.sign(np.sin(2 * np.pi * np.cumsum(120 + 25 * np.sin(2 * np.pi * 0.7 * t)) / rate)) + 0.2 * x
        x = 0
        for f, w in ((600, 1), (1500, 0.6), (2600, 0.4)):
            sos = butter(2, (0.8 * f, 1.25 * f), "bandpass", fs=rate, output="sos")
            x = x + w * sosfilt(sos, buzz) * (0.6 + 0.4 * np.sin(2 * np.pi * 3.1 * t + f))
        x = x * np.clip(np.sin(2 * np.pi * 2.3 * t) + 0.4, 0, 1)
    elif kind == "music":
        x = np.zeros(n)
        for beat in range(int(n / rate * 2)):
            at = int(beat * rate / 2)
            m = min(int(0.9 * rate), n - at)
            tau = np.arange(m) / rate
            for note in rng.integers(0, 36, 3):
                f = 110 * 2 ** (note / 12)
                for k in range(1, 7):
                    x[at : at + m] += np.sin(2 * np.pi * k * f * tau) * np.exp(-3 * tau * k**0.5) / k
    return x / np.sqrt(np.mean(x**2))


def main():
    rate, x = wavfile.read(sys.argv[1])
    new_rate, ppm, start, total = int(sys.argv[3]), float(sys.argv[4]), float(sys.argv[5]), float(sys.argv[6])
    kind, level, rng = sys.argv[7], float(sys.argv[8]), np.random.default_rng(int(sys.argv[9]))
    cut = [float(v) for v in sys.argv[10:12]] or [0, 0]
    take = between(x.astype(float), rate, new_rate, ppm)
    out = level * clutter(kind, int(total * new_rate), new_rate, rng)
    at = int(start * new_rate)
    around = slice(max(at - new_rate // 5, 0), at + len(take) + new_rate // 2)
    out[around] = 0
    room = out[at : at + len(take)]
    room += take[: len(room)]
    out += 1e-5 * rng.standard_normal(len(out)) + rng.uniform(-0.5, 0.5, len(out)) / 32768  # dither
    out = out[int(cut[0] * new_rate) : len(out) - int(cut[1] * new_rate)]
    wavfile.write(sys.argv[2], new_rate, np.clip(np.round(out * 32768), -32768, 32767).astype(np.int16))


main()
