#!/usr/bin/env python3
"""independent.py KIND ...: the line's numbers once more, by another way.

Written from the measurement's equations with NumPy and SciPy and standard-library XML; it shares no code with the programs.
Documents are read as any XML tool would read them: base64 and hashlib for the samples, attributes for all else.

  independent.py moduli RUN.xml POINTS.xml      every burst: sine fit, ladder, geometry, shared uncertainties
"""
import base64
import hashlib
import math
import sys
import xml.etree.ElementTree as ElementTree

import numpy as np
from scipy.optimize import minimize_scalar

NAMESPACE = "{urn:x-anelast:documents:1}"
failures = []


def check(name, value, lowest, highest):
    """One line a check; written so that NaN fails."""
    good = lowest <= value <= highest
    print(f"{'ok' if good else 'FAIL'}  {name}: {value:.5g} (allowed {lowest:g} .. {highest:g})")
    if not good:
        failures.append(name)


def all_of(element, path):
    return element.findall("/".join(NAMESPACE + step for step in path.split("/")))


def one(element, path):
    found = all_of(element, path)
    return found[0] if found else None


def value(element, path, otherwise=math.nan):
    found = one(element, path)
    return otherwise if found is None else float(found.get("value"))


# ---- samples ----

DTYPE = {"float64": "<f8", "float32": "<f4", "int32": "<i4", "int16": "<i2"}


def samples(signal):
    raw = b""
    for part in all_of(signal, "part"):
        piece = base64.b64decode(part.text)
        if hashlib.sha256(piece).hexdigest() != part.get("sha256"):
            failures.append("SHA-256 of a part")
        raw += piece
    stored = np.frombuffer(raw, DTYPE[signal.get("coding")]).astype(float)
    return stored * float(signal.get("scale")) / float(signal.get("divisor", "1")) + float(signal.get("offset"))


def burst_of(element):
    signals = {signal.get("quantity"): samples(signal) for signal in all_of(element, "signal")}
    clock = one(element, "clock")
    if clock is not None:
        signals["time"] = float(clock.get("start")) + float(clock.get("interval")) * np.arange(int(clock.get("count")))
    return signals


# ---- sine fit [IEEE Std 1057, two channels with one frequency; drift and harmonics in the same linear model] ----

def design(t, frequency, harmonics, decays):
    phase = 2 * np.pi * frequency * t
    x = t / np.max(np.abs(t))
    columns = [f(h * phase) for h in range(1, harmonics + 1) for f in (np.cos, np.sin)] + [np.ones_like(x), x, x ** 2]
    length = (t[-1] - t[0]) * len(t) / (len(t) - 1)
    return np.column_stack(columns + [np.exp(-rate * (t - t[0])) for rate in (2 * frequency, 2.5 / length)[:decays]])


def sine_fit(t, channels, set_frequency, harmonics, decays):
    """Stiffness F / X, its noise covariance (Re, Im), the frequency."""
    t = t - 0.5 * (t[0] + t[-1])
    cycles = (t[-1] - t[0]) * len(t) / (len(t) - 1) * set_frequency
    harmonics = min(harmonics, max(1, int(len(t) / cycles / 2 - 1)))
    decays = min(decays, 1) if cycles < 3.95 else decays
    y = np.column_stack(channels)

    def residuals(frequency):
        a = design(t, frequency, harmonics, decays)
        return y - a @ np.linalg.lstsq(a, y, rcond=None)[0]

    frequency, step = set_frequency, 0.3 / (t[-1] - t[0])
    for _ in range(3):
        weight = 1 / np.sum(residuals(frequency) ** 2, axis=0)
        found = minimize_scalar(lambda f: np.sum(weight * np.sum(residuals(f) ** 2, axis=0)) - 2,
                                bracket=(frequency - step, frequency, frequency + step), tol=1e-12)
        frequency, step = found.x, step / 100
    a = design(t, frequency, harmonics, decays)
    coefficients = np.linalg.lstsq(a, y, rcond=None)[0]
    variance = np.sum((y - a @ coefficients) ** 2, axis=0) / (len(t) - a.shape[1] - 0.5)
    amplitude = coefficients[0] - 1j * coefficients[1]  # y = Re(amplitude exp(i phase))
    gram = np.linalg.inv(a.T @ a)[:2, :2]
    stiffness = amplitude[1] / amplitude[0]
    # dK = (dF - K dX) / X with dF, dX = cosine part - i sine part
    to_k = [np.array([[c.real, (-1j * c).real], [c.imag, (-1j * c).imag]]) for c in (-stiffness / amplitude[0], 1 / amplitude[0])]
    covariance = sum(v * m @ gram @ m.T for v, m in zip(variance, to_k))
    return stiffness, covariance, frequency


# ---- apparatus and geometry ----

def form_factor(g):
    """K_s / E [m] from the textbook rows."""
    kind, length, width, thick = g["kind"], g["length"], g["width"], g["thickness"]
    slender = (thick / length) ** 2
    ratio = 2 * (1 + g["poisson"]) if not math.isnan(g["poisson"]) else 0.0  # E / G of an isotropic material
    if kind == "tension":
        return width * thick / length
    phi = 1.2 * ratio * slender
    return {"cantilever, guided end": 1, "cantilever, dual": 2, "bending, three-point": 4}[kind] \
        * width * slender ** 1.5 / (1 + phi)


def constants_of(document):
    geometry = one(document, "specimen/geometry")
    found, u = {"kind": geometry.get("kind")}, {}
    for name in ("length", "width", "thickness", "poisson"):
        found[name] = value(geometry, name)
    for name in ("length", "width", "thickness"):
        u[name] = float(one(geometry, name).get("u", "0"))
    for name, path in (("force_gain", "force/gain"), ("displacement_gain", "displacement/gain"), ("force_delay", "force/delay"),
                       ("displacement_delay", "displacement/delay"), ("moving_mass", "moving_mass"), ("compliance", "compliance")):
        element = one(document, "apparatus/" + path)
        found[name] = (1.0 if "gain" in name else 0.0) if element is None else float(element.get("value"))
        u[name] = 0.0 if element is None else float(element.get("u", "0"))
    return found, u


def modulus(stiffness, frequency, c):
    """K measured at the drive to E*: channels, mass, compliance, form."""
    omega = 2 * np.pi * frequency
    k = stiffness * c["displacement_gain"] / c["force_gain"] * np.exp(-1j * omega * (c["force_delay"] - c["displacement_delay"]))
    k = k + c["moving_mass"] * omega ** 2
    return 1 / (1 / k - c["compliance"]) / form_factor(c)


SOURCES = {"length": "length", "width": "width", "thickness": "thickness", "force gain": "force_gain",
           "displacement gain": "displacement_gain", "moving mass": "moving_mass", "frame compliance": "compliance",
           "channel delay": "force_delay"}


def common_difference(point, stiffness, frequency, constants, u):
    """Greatest difference of a stated shared vector from one reduced anew with a constant off by its u, in parts of it."""
    worst, centre = 0.0, modulus(stiffness, frequency, constants)
    stated = {row.get("source"): float(row.get("storage")) + 1j * float(row.get("loss")) for row in all_of(point, "common")}
    for source, name in SOURCES.items():
        if u[name] > 0:
            moved = modulus(stiffness, frequency, dict(constants, **{name: constants[name] + u[name]})) - centre
            worst = max(worst, abs(stated.get(source, 0) - moved) / abs(moved))
    total = math.sqrt(sum(v.real ** 2 for v in stated.values()))
    listed = float(one(point, "storage").get("u_common"))
    return max(worst, abs(total - listed) / max(listed, 1e-300) if total > 0 else 0.0)


def moduli(run_path, points_path):
    document = ElementTree.parse(points_path).getroot()
    points = {point.get("burst"): point for point in all_of(document, "point")}
    choice = {row.get("name"): row.get("value") for row in all_of(document, "made/choice")}
    constants, u = constants_of(document)
    error, spread, common, temperatures = [], [], [], []
    for element in all_of(ElementTree.parse(run_path).getroot(), "burst"):
        point = points[element.get("n")]
        clipped = any(row.get("code") == "clipping" for row in all_of(point, "remark"))
        if point.get("state") == "skipped" or clipped:
            continue
        burst = burst_of(element)
        kept = slice(-int(one(point, "record").get("samples")), None)
        start = value(element, "set_frequency", value(point, "frequency"))
        stiffness, covariance, frequency = sine_fit(burst["time"][kept], (burst["displacement"][kept], burst["force"][kept]), start,
                                                    int(choice["harmonics"]), int(choice["decay_terms"]))
        e = modulus(stiffness, frequency, constants)
        slope = (modulus(stiffness * (1 + 1e-6), frequency, constants) - e) / (1e-6 * stiffness)
        turn = np.array([[slope.real, -slope.imag], [slope.imag, slope.real]])
        own = np.sqrt(np.diag(turn @ covariance @ turn.T))
        for name, ours, u_ours in (("storage", e.real, own[0]), ("loss", e.imag, own[1])):
            stated = float(one(point, name).get("u_noise"))
            error.append(abs(value(point, name) - ours) / stated)
            spread.append(stated / u_ours)
        common.append(common_difference(point, stiffness, frequency, constants, u))
        temperatures.append(abs(np.mean(burst["temperature"][kept]) - value(point, "temperature")))
    check("bursts reduced twice", len(common), max(1, 0.8 * len(points)), len(points))
    # The same equations on the same samples: what is left is where the search for the frequency stops.
    check("E', E'': greatest difference, in stated noise uncertainties", max(error), 0, 0.05)
    # White noise on our side; the programs read it near the line where that differs beyond chance, upwards on these dumps
    check("stated noise over white noise's, median", np.median(spread), 0.9, 1.25)
    check("stated noise over white noise's, least", min(spread), 0.9, 1.01)
    # One side here, both sides there: they part by the curvature over one u
    check("shared uncertainties, greatest relative difference", max(common), 0, 0.02)
    check("temperature, greatest difference in K", max(temperatures), 0, 1e-6)


if __name__ == "__main__":
    {"moduli": moduli}[sys.argv[1]](*sys.argv[2:])
    sys.exit(1 if failures else 0)
