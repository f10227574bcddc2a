#!/usr/bin/env python3
"""Writes the session folder next to it: Python's own wave, json and hashlib.

Two takes of 16-bit PCM, one with a loopback channel, with the samples
n % 200 - 100 for microphone and 100 - n % 200 for loopback, in 1/32768. The
manifest is of schema 1, with keys that a later version might add.
"""
import hashlib, json, pathlib, struct, wave

HERE = pathlib.Path(__file__).parent
DIR = HERE / "folder"
RIG = "# first\nunit: {tag: RB-07, serial: \"0193\"}\naudio: {backend: wav}\ndistances: [30mm, 2.5in]\n"


def take(name, channels, samples):
    path = DIR / "takes" / name
    path.parent.mkdir(parents=True, exist_ok=True)
    with wave.open(str(path), "wb") as w:
        w.setnchannels(channels)
        w.setsampwidth(2)
        w.setframerate(44100)
        for n in range(samples):
            v = n % 200 - 100
            w.writeframes(struct.pack("<%dh" % channels, *[v, -v][:channels]))
    return hashlib.sha256(path.read_bytes()).hexdigest()


one, two = take("30mm-1.wav", 1, 500), take("2.5in-1.wav", 2, 400)
(DIR / "rig.yaml").write_text(RIG)
manifest = {
    "schema": "standoff/session/1", "version": "0.1.0", "tag": "RB-07", "serial": "0193",
    "rig_sha256": hashlib.sha256(RIG.encode()).hexdigest(),
    "created": "2025-03-04T09:30:00Z", "recorder": "field recorder",
    "room": {"name": "store", "exact": 1234567890123456789},
    "takes": [
        {"file": "takes/30mm-1.wav", "distance": "30mm", "number": 1, "nominal_m": 0.03, "sha256": one,
         "started": "2025-03-04T09:31:00+01:00", "sample_rate_hz": 44100, "channels": 1,
         "overflows": 0, "underflows": 0, "source": "desk 1.wav", "judged": True, "accepted": True, "flags": [],
         "quality": {"peak_dbfs": -50.3, "snr_db": 61.5, "arrival_s": 0.0021}, "humour": "dry"},
        {"file": "takes/2.5in-1.wav", "distance": "2.5in", "number": 1, "nominal_m": 0.0635, "sha256": two,
         "sample_rate_hz": 44100, "channels": 2, "overflows": 1, "underflows": 2,
         "judged": True, "accepted": False, "flags": ["xrun", "of-tomorrow"], "reason": "data lost",
         "quality": {"peak_dbfs": None, "snr_db": 12}},
    ],
}
(DIR / "session.json").write_text(json.dumps(manifest, indent=1))
