"""The main chain in numpy and scipy, to hold the program's time and memory against.

The same steps on the same files: deconvolve every take, find the direct sound,
make the response compact by its rise, gate, transform, average; fit six forms by
variable projection, twice for the gate and twice for what is left unexplained; fit
each distance alone. It does not judge takes and draws nothing.

usage: chain.py SESSION SWEEP.wav   prints one line of JSON
"""
import json
import re
import sys
import time
from pathlib import Path

import numpy as np
from scipy.fft import irfft, next_fast_len, rfft, rfftfreq
from scipy.io import wavfile
from scipy.optimize import least_squares
from scipy.signal import hilbert, welch

SETBACK, SETBACK_U, RADIUS, RADIUS_U, SPEED_U, TAPE = 0.006, 0.001, 0.017, 0.001, 0.6, 0.0005
LOW, FROM, TO, HIGH = 20 / 2**0.5, 20.0, 20000.0, 20000 * 2 ** (1 / 6)
FIT_FROM, FIT_TO = 80.0, 5000.0


def step(f, zero, one):
    with np.errstate(all="ignore"):
        x = np.clip(np.log(f / zero) / np.log(one / zero), 1e-9, 1 - 1e-9)
        a, b = np.exp(-1 / x), np.exp(-1 / (1 - x))
    return a / (a + b)


class Deconvolver:
    def __init__(self, x, rate, longest):
        self.n = next_fast_len(longest + rate, True)
        self.rate = rate
        spectrum = rfft(x, self.n)
        f = rfftfreq(self.n, 1 / rate)
        f[0] = 1e-3
        power = np.abs(spectrum) ** 2
        top = power[(f > FROM) & (f < TO)].max()
        self.inverse = np.conj(spectrum) * step(f, LOW, FROM) * step(f, HIGH, TO) / (power + 1e-9 * top)
        self.f = f

    def impulse(self, y):
        return irfft(rfft(y, self.n) * self.inverse, self.n)

    def noise_gain(self, hz):
        g = np.abs(self.inverse) ** 2
        at = (hz / self.rate * self.n).astype(int)
        w = np.maximum((at * 0.03).astype(int), 1)
        return np.array([g[i - k : i + k + 1].mean() for i, k in zip(at, w)])


def band(x, rate, lo, hi):
    n = next_fast_len(2 * len(x), True)
    f = rfftfreq(n, 1 / rate)
    f[0] = 1e-3
    return np.abs(hilbert(irfft(rfft(x, n) * step(f, lo / 1.26, lo) * step(f, hi * 1.26, hi), n)))[: len(x)]


# ---- models -------------------------------------------------------------------


def sphere(k, a, R, cos):
    """Pole pressures by the scaled functions g_m; all arguments broadcast."""
    x, y = k * a, k * R
    ga0, ga1 = -1j * np.exp(1j * x), -(x + 1j) * np.exp(1j * x)
    gr0, gr1 = -1j * np.exp(1j * y), -(y + 1j) * np.exp(1j * y)
    p0, p1 = np.ones_like(cos), cos
    ratio = a / R
    power = ratio
    even, odd = power * gr0 / -ga1, 0
    for m in range(1, 24):
        power = power * ratio
        e = x * x / (2 * m - 1) * ga0 - (m + 1) * ga1
        term = (2 * m + 1) * power * p1 * gr1 / e
        if m % 2:
            odd = odd + term
        else:
            even = even + term
        c = (2 * m + 1) * (2 * m - 1)
        ga0, ga1 = ga1, ga1 - x * x / c * ga0
        gr0, gr1 = gr1, gr1 - y * y / c * gr0
        p0, p1 = p1, ((2 * m + 1) * cos * p1 - m * p0) / (m + 1)
    return np.conj(-(even + odd) / a), np.conj(-(even - odd) / a)


U, W = np.polynomial.legendre.leggauss(6)
U, W = (U + 1) / 2, W / 2


def piston(k, x, b):
    R = np.hypot(x, b)
    return 2 / (1j * k * b * b) * (np.exp(-1j * k * x) - np.exp(-1j * k * R))


def pressures(form, k, r, d, b):
    if form[1] == "open":
        return piston(k, r - d / 2, b), piston(k, r + d / 2, b), piston(k, r, b)
    rho = b * np.sqrt(U)
    R = np.hypot(r[..., None], rho)
    f, q = sphere(k[..., None], d / 3, R, r[..., None] / R)
    front, rear = f @ W, q @ W
    return front, rear, (front + rear) / 2


def mix(form, k, beta, d, front, rear, centre):
    if form[0] == "summed":
        return (1 - beta) * centre + beta * (front - rear) / (1j * k * d)
    tau = d * (1 - beta) / beta
    network = 1 / (1 + 1j * k * tau) if form[2] == "low-pass" else np.exp(-1j * k * tau)
    return (front - rear * network) / (1j * k * (d + tau))


def output(form, k, r, beta, d, b):
    return mix(form, k, beta, d, *pressures(form, k, r, d, b))


def rise(form, f, r, beta, d, b, c):
    """Near over far, level above what means something."""
    length = d + (d * (1 - beta) / beta if form[0] == "phase-shift" else 0)
    k = 2 * np.pi * np.minimum(f, 0.4 * c / length) / c
    far = output(form, k, np.full_like(k, 300.0), beta, d, b) / piston(k, np.full_like(k, 300.0), b)
    return output(form, k, np.full_like(k, r), beta, d, b) / piston(k, np.full_like(k, r), b) / far


class Joint:
    def __init__(self, form, hz, nominal, y, variance, unexplained, speed):
        self.form, self.hz, self.nominal, self.y, self.speed = form, hz, nominal, y, speed
        self.sigma = np.sqrt((variance + (unexplained * np.abs(y)) ** 2) / 2)
        self.variance = variance

    def far(self, x):
        r = self.nominal + x[2] + x[5:]
        k = np.broadcast_to(2 * np.pi * self.hz / x[4], self.y.shape)
        r = np.maximum(r, x[1] * 0.56)
        h = output(self.form, k, np.broadcast_to(r[:, None], self.y.shape), x[0], x[1], x[3]) / self.sigma
        v = self.y / self.sigma
        s = (np.conj(h) * v).sum(0) / (np.abs(h) ** 2).sum(0)
        return v - h * s, s

    def residuals(self, x):
        r, _ = self.far(x)
        prior = [(x[2] - SETBACK) / SETBACK_U, (x[3] - RADIUS) / RADIUS_U, (x[4] - self.speed) / SPEED_U]
        return np.concatenate((r.real.ravel(), r.imag.ravel(), prior, x[5:] / TAPE))

    def fit(self, start=None):
        n = len(self.nominal)
        low = 0.08 if self.form[0] == "phase-shift" else -0.15
        base = np.concatenate(([0.5, 0.02, SETBACK, RADIUS, self.speed], np.zeros(n)))
        if start is None:
            best = np.inf
            for beta in (0.02, 0.12, 0.22, 0.32, 0.45, 0.6, 0.8, 1.0):
                for d in 0.006 * 1.25 ** np.arange(11):
                    x = base.copy()
                    x[0], x[1] = max(beta, low), min(d, 0.06)
                    cost = (self.residuals(x) ** 2).sum()
                    if cost < best:
                        best, start = cost, x
        lower = np.concatenate(([low, 0.001, -1, 0, 300], np.full(n, -1.0)))
        upper = np.concatenate(([1.25, 0.062, 1, 0.05, 400], np.full(n, 1.0)))
        scale = np.concatenate(([0.1, 0.01, SETBACK_U, RADIUS_U, SPEED_U], np.full(n, TAPE)))
        start = np.clip(start, lower + 1e-9, upper - 1e-9)
        self.result = least_squares(self.residuals, start, bounds=(lower, upper), x_scale=scale, xtol=1e-9, ftol=1e-10)
        return self

    def unexplained(self):
        r, _ = self.far(self.result.x)
        freedom = 2 * self.y.size - 2 * len(self.hz) - 2
        lo, hi = 3e-4, 0.1
        for _ in range(30):
            mid = np.sqrt(lo * hi)
            chi = (2 * np.abs(r * self.sigma) ** 2 / (self.variance + (mid * np.abs(self.y)) ** 2)).sum() / freedom
            lo, hi = (mid, hi) if chi > 1 else (lo, mid)
        return hi


FORMS = [
    ("phase-shift", "sphere", "delay"),
    ("phase-shift", "sphere", "low-pass"),
    ("phase-shift", "open", "delay"),
    ("phase-shift", "open", "low-pass"),
    ("summed", "sphere", ""),
    ("summed", "open", ""),
]


def fit_all(hz, nominal, y, variance, unexplained, speed, before=None):
    out = []
    for form in FORMS:
        start = next((j.result.x for j in before or [] if j.form == form), None)
        out.append(Joint(form, hz, nominal, y, variance, unexplained, speed).fit(start))
    return sorted(out, key=lambda j: j.result.cost)


def alone(best, i):
    keep = np.arange(len(best.nominal)) != i
    others = Joint(best.form, best.hz, best.nominal[keep], best.y[keep], best.variance[keep], best.unex, best.speed)
    x = best.result.x
    others.fit(np.concatenate((x[:5], x[5:][keep])))
    _, s = others.far(others.result.x)
    o = others.result.x
    k = 2 * np.pi * best.hz / o[4]

    def residuals(p):
        r = np.full_like(k, max(best.nominal[i] + o[2] + p[2], 0.56 * p[1]))
        v = (best.y[i] - output(best.form, k, r, p[0], p[1], o[3]) * s) / best.sigma[i]
        return np.concatenate((v.real, v.imag, [p[2] / TAPE]))

    return least_squares(residuals, [x[0], x[1], 0], x_scale=[0.1, 0.01, TAPE]).x


def main():
    begun = time.perf_counter()
    folder, sweep = Path(sys.argv[1]), sys.argv[2]
    rate, x = wavfile.read(sweep)
    speed = float(sys.argv[3])
    places = {}
    for path in sorted((folder / "takes").glob("*.wav")):
        label = path.stem.rsplit("-", 1)[0]
        places.setdefault(label, []).append(path)
    metres = lambda s: float(re.match(r"[\d.]+", s)[0]) * {"mm": 1e-3, "in": 0.0254}[re.search(r"[a-z]+$", s)[0]]
    order = sorted(places, key=metres)
    nominal = np.array([metres(s) for s in order])
    dec = None
    responses = []
    for label in order:
        for path in places[label]:
            _, y = wavfile.read(path)
            dec = dec or Deconvolver(x.astype(float), rate, len(y))
            h = dec.impulse(y.astype(float))
            at = int(np.argmax(np.abs(np.diff(h))))
            h = np.roll(h, -at + int(0.06 * rate))[: int(0.41 * rate)]
            env = band(h, rate, 1000, 6000)
            peak = int(np.argmax(env))
            quiet = y[: int(0.58 * rate)].astype(float)
            f, psd = welch(quiet, rate, nperseg=8192)
            responses.append((label, h, peak, at - int(0.06 * rate), f, psd * rate / 2))
    gate = float(sys.argv[4])
    hz, t = [], FIT_FROM
    while t <= FIT_TO:
        hz.append(t)
        t = max(t * 2 ** (1 / 12), t + 1 / (0.0015 * 0.75 + gate * 0.75))
    hz = np.array(hz)
    start = np.median([p + o - (nominal[order.index(s)] + SETBACK) / speed * rate for s, _, p, o, _, _ in responses])

    def spectra(rises):
        y, variance = [], []
        for label in order:
            values, noises = [], []
            for s, h, peak, first, f, psd in responses:
                if s != label:
                    continue
                n = next_fast_len(2 * len(h), True)
                grid = 2.0 * 2 ** (np.arange(24 * 14) / 24)
                e = rises[label](grid)
                fb = np.maximum(rfftfreq(n, 1 / rate), 2.0)
                eb = np.interp(np.log(fb), np.log(grid), e.real) + 1j * np.interp(np.log(fb), np.log(grid), e.imag)
                c = irfft(rfft(h, n) / eb, n)[: len(h)]
                t = (np.arange(len(h)) - peak) / rate
                rised = lambda v: 0.5 - 0.5 * np.cos(np.pi * np.clip(v, 0, 1))
                w = rised((t + 0.0015) / 0.00075) * rised((gate - t) / (0.4 * gate))
                i = np.nonzero(w)[0]
                n0 = i + first - start
                v = np.exp(-2j * np.pi * hz[:, None] * n0 / rate) @ (c[i] * w[i])
                er = np.interp(np.log(hz), np.log(grid), e.real) + 1j * np.interp(np.log(hz), np.log(grid), e.imag)
                values.append(v * er)
                noises.append(np.interp(hz, f, psd) * dec.noise_gain(hz) * (w**2).sum())
            y.append(np.mean(values, 0))
            variance.append(np.mean(noises, 0) / len(noises))
        return np.array(y), np.array(variance)

    rises = {s: (lambda f, r=r: 1 + 0.5 * speed / (r + SETBACK) / (2j * np.pi * f)) for s, r in zip(order, nominal)}
    fits = None
    for _ in range(2):
        y, variance = spectra(rises)
        fits = fit_all(hz, nominal, y, variance, 0.003, speed, fits)
        best = fits[0]
        p = best.result.x
        rises = {s: (lambda f, r=r: rise(best.form, f, r, p[0], p[1], p[3], p[4])) for s, r in zip(order, nominal + p[2] + p[5:])}
    y, variance = spectra(rises)
    fits = fit_all(hz, nominal, y, variance, 0.003, speed, fits)
    unexplained = fits[0].unexplained()
    fits = fit_all(hz, nominal, y, variance, unexplained, speed, fits)
    best = fits[0]
    best.unex = unexplained
    for i in range(len(order)):
        alone(best, i)
    print(json.dumps({
        "mix": best.result.x[0], "spacing_m": best.result.x[1], "form": best.form,
        "seconds": time.perf_counter() - begun,
        "peak_mb": int(re.search(r"VmHWM:\s+(\d+)", Path("/proc/self/status").read_text())[1]) / 1024,
    }))


main()
