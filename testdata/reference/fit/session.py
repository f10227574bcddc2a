#!/usr/bin/env python3
"""Solves the joint fit of one measured session by scipy's least_squares, with the
models and the problem of make.py.

    session.py exported.json      prints {"beta": ..., "spacing": ..., "cost": ...}
"""
import json
import sys

import numpy as np

import make


def main(path):
    with open(path) as f:
        d = json.load(f)
    make.HZ = np.array(d["hz"])
    make.NOMINAL = [p["nominal_m"] for p in d["points"]]
    make.SETBACK = (d["setback_m"], d["setback_u_m"])
    make.SPEED = (d["speed_m_s"], d["speed_u_m_s"])
    make.TAPE = d["points"][0]["tape_u_m"]
    s = make.Set.__new__(make.Set)
    s.form, s.body, s.source, s.free = d["form"], d["body"], "piston", False
    s.beta, s.d, s.radius, s.n = 0.45, 0.025, (d["radius_m"], d["radius_u_m"]), len(d["points"])
    s.y = np.array([np.array(p["re"]) + 1j * np.array(p["im"]) for p in d["points"]])
    s.variance = np.array([p["variance"] for p in d["points"]])
    r = s.solve(s.start(), s.variance)
    x, _ = s.split(r.x)
    print(json.dumps({"beta": x[0], "spacing": x[1], "setback": x[2], "radius": x[3], "speed": x[4], "cost": float(r.cost)}))


if __name__ == "__main__":
    main(sys.argv[1])
