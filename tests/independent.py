#!/usr/bin/env python3
"""independent.py KIND ...: the line's numbers once more, by another way.

Written from the measurement's equations with NumPy and SciPy and standard-library XML; it shares no code with the programs.
Documents are read as any XML tool would read them: base64 and hashlib for the samples, attributes for all else.

  independent.py moduli RUN.xml POINTS.xml      every burst: sine fit, ladder, geometry, shared uncertainties
  independent.py shifts GRID.xml MASTER.xml     all shifts and a smooth spectrum together, the law, its choice
  independent.py spectrum GRID.xml MASTER.xml MATERIAL.xml   sums, window, misfit, covariance
"""
import base64
import hashlib
import math
import sys
import xml.etree.ElementTree as ElementTree

import numpy as np
from scipy.optimize import least_squares, minimize_scalar, nnls

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


def loss_factor_u(point):
    """Noise of E''/E' from the noise matrix."""
    storage, loss, noise = value(point, "storage"), value(point, "loss"), one(point, "noise")
    slope = np.array([-loss / storage ** 2, 1 / storage])
    ss, sl, ll = (float(noise.get(name)) for name in ("storage_storage", "storage_loss", "loss_loss"))
    return math.sqrt(slope @ np.array([[ss, sl], [sl, ll]]) @ slope)


def moduli(run_path, points_path):
    document = ElementTree.parse(points_path).getroot()
    points = {point.get("burst"): point for point in all_of(document, "point")}
    choice = {row.get("name"): row.get("value") for row in all_of(document, "made/choice")}
    constants, u = constants_of(document)
    error, spread, common, angle, temperatures = [], [], [], [], []
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
        angle.append(abs(float(one(point, "loss_factor").get("u_noise")) / loss_factor_u(point) - 1))
        common.append(common_difference(point, stiffness, frequency, constants, u))
        temperatures.append(abs(np.mean(burst["temperature"][kept]) - value(point, "temperature")))
    check("bursts reduced twice", len(common), max(1, 0.8 * len(points)), len(points))
    # The same equations on the same samples: what is left is where the search for the frequency stops.
    check("E', E'': greatest difference, in stated noise uncertainties", max(error), 0, 1e-3)
    # White noise on our side; the programs read it near the line where that differs beyond chance, upwards on these dumps
    check("stated noise over white noise's, median", np.median(spread), 0.9, 1.25)
    check("stated noise over white noise's, least", min(spread), 0.9, 1.01)
    # One side here, both sides there: they part by the curvature over one u
    check("shared uncertainties, greatest relative difference", max(common), 0, 0.02)
    check("u of the loss factor from the noise of E', E'': greatest relative difference", max(angle), 0, 1e-6)
    check("temperature, greatest difference in K", max(temperatures), 0, 1e-6)


# ---- superposition ----

LN10 = math.log(10)


def cells_of(grid):
    """Isotherm of every cell, angular frequency, E', E'', and the noise: var E', cov, var E''."""
    rows = []
    for i, isotherm in enumerate(all_of(grid, "isotherm")):
        for cell in all_of(isotherm, "cell"):
            noise = one(cell, "noise")
            rows.append([i, 2 * np.pi * value(cell, "frequency"), value(cell, "storage"), value(cell, "loss"),
                         *(float(noise.get(name)) for name in ("storage_storage", "storage_loss", "loss_loss"))])
    return np.array(rows)


def shifts_of(master):
    rows = all_of(master, "shifts/shift")
    columns = [np.array([value(row, name) for row in rows]) for name in ("temperature", "log10_aT", "log10_bT")]
    noise = np.array([float(one(row, "log10_aT").get("u_noise")) for row in rows])
    u_temperature = np.array([float(one(row, "temperature").get("u")) for row in rows])
    return (*columns, noise, u_temperature)


class Joint:
    """All shifts and the logarithms of a dense spectrum as free unknowns of one nonlinear least-squares problem: another way
    to the same optimum than a linear spectrum inside the shifts. The third difference of ln H is held small."""

    STIFFNESS, PER_DECADE = 3.0, 4

    def __init__(self, cells, start, log_b, reference):
        self.isotherm = cells[:, 0].astype(int)
        self.omega, self.b = cells[:, 1], 10 ** log_b[self.isotherm]
        l11 = np.sqrt(cells[:, 4])
        l21 = cells[:, 5] / l11
        l22 = np.sqrt(cells[:, 6] - l21 ** 2)
        self.white = lambda storage, loss: np.concatenate([(storage.T / l11).T, ((loss - (storage.T * l21 / l11).T).T / l22).T])
        self.y = self.white(cells[:, 2], cells[:, 3])
        self.free = [i for i in range(len(start)) if i != reference]
        self.start = start
        reduced = np.log10(self.omega) + start[self.isotherm]
        self.tau = 10 ** np.arange(-reduced.max() - 1, -reduced.min() + 1, 1 / self.PER_DECADE)
        self.rough = self.STIFFNESS * np.diff(np.eye(len(self.tau)), 3, axis=0)

    def kernel(self, log_a):
        q = (self.omega * 10 ** log_a[self.isotherm])[:, None] * self.tau
        ones = np.ones((len(q), 1))
        storage = np.hstack([q ** 2 / (1 + q ** 2), ones]) * self.b[:, None]
        loss = np.hstack([q / (1 + q ** 2), 0 * ones]) * self.b[:, None]
        slope = [np.hstack([LN10 * d, 0 * ones]) * self.b[:, None]
                 for d in (2 * q ** 2 / (1 + q ** 2) ** 2, q * (1 - q ** 2) / (1 + q ** 2) ** 2)]
        return self.white(storage, loss), slope

    def unpack(self, p):
        log_a = np.zeros(len(self.start))
        log_a[self.free] = p[:len(self.free)]
        return log_a, np.exp(p[len(self.free):])

    def residual(self, p):
        log_a, h = self.unpack(p)
        return np.concatenate([self.kernel(log_a)[0] @ h - self.y, self.rough @ p[len(self.free):-1]])

    def jacobian(self, p):
        n, (log_a, h) = len(self.free), self.unpack(p)
        rows, slope = self.kernel(log_a)
        j = np.zeros((len(self.y) + len(self.rough), len(p)))
        j[:len(self.y), n:] = rows * h
        change = self.white(slope[0] @ h, slope[1] @ h)
        both = np.concatenate([self.isotherm, self.isotherm])
        for column, i in enumerate(self.free):
            j[:len(self.y), column] = np.where(both == i, change, 0)
        j[len(self.y):, n:-1] = self.rough
        return j

    def fit(self):
        rows = self.kernel(self.start)[0]
        scale = np.linalg.norm(rows, axis=0)
        h = nnls(rows / scale, self.y, maxiter=20000)[0] / scale
        smooth = np.convolve(h[:-1], np.ones(9) / 9, "same") + 1e-6 * h.max()
        p = np.concatenate([self.start[self.free], np.log(smooth), [np.log(h[-1] + 1e-3 * h.max())]])
        found = least_squares(self.residual, p, self.jacobian, x_scale="jac", max_nfev=400, xtol=1e-13, ftol=1e-13)
        information = found.jac.T @ found.jac
        n = len(self.free)
        u = np.sqrt(np.diag(np.linalg.inv(information + 1e-12 * np.eye(len(information)))))[:n]
        return self.unpack(found.x)[0], u


def own_law(kind, temperature, reference):
    """log10 a_T as a function of the constants; crossover: WLF constants stand at T_x."""
    def wlf(c1, c2, t, at):
        return -c1 * (t - at) / (c2 + t - at)

    def crossover(c, t):
        below = c[3] / (LN10 * 8.31446261815324) * (1 / t - 1 / c[2])  # molar gas constant, SI 2019
        return np.where(t >= c[2], wlf(c[0], c[1], t, c[2]), below)

    if kind == "wlf":
        return lambda c: wlf(c[0], c[1], temperature, reference)
    return lambda c: crossover(c, temperature) - crossover(c, np.array([reference]))[0]


def check_law(master, temperature, log_a, reference, u_temperature):
    n = len(temperature)
    covariance = np.array(one(master, "shifts/covariance").text.split(), dtype=float).reshape(2 * n, 2 * n)[:n, :n]
    rows = [i for i in range(n) if covariance[i, i] > 0]
    slope = np.gradient(log_a, temperature)
    u2 = np.mean(u_temperature) ** 2
    covariance = covariance + np.diag(slope ** 2) * u2 + slope[reference] ** 2 * u2
    lower = np.linalg.cholesky(covariance[np.ix_(rows, rows)])
    trials = all_of(master, "trial")
    chosen = next(trial for trial in trials if trial.get("chosen") in ("true", "1"))
    constants = [(float(row.get("value")), float(row.get("u"))) for row in all_of(chosen, "law/constant")]
    law = own_law(chosen.get("kind"), temperature, value(chosen, "law/reference_temperature"))
    found = least_squares(lambda c: np.linalg.solve(lower, (law(c) - log_a)[rows]), [1.01 * v if k < 2 else v for k, (v, _) in
                          enumerate(constants)], x_scale=[u for _, u in constants], xtol=1e-14, ftol=1e-14)
    print("    law", chosen.get("kind"), found.x)
    check("constants of the law, greatest difference in stated u", max(abs(v - own) / u for (v, u), own in
                                                                     zip(constants, found.x)), 0, 0.1)
    check("chi-square of the law, stated over own", value(chosen, "chi_square") / (2 * found.cost), 0.97, 1.03)
    # Akaike's criterion with the correction for few data; chi-square in units of the least excess of a law that stands
    k_of = lambda trial: int(trial.get("constants"))
    stands = [trial for trial in trials if not trial.get("refused")]
    excess = max(1, min(value(t, "chi_square") / (len(rows) - k_of(t)) for t in stands))
    worst = max(abs(value(t, "criterion") / (value(t, "chi_square") / excess + 2 * k_of(t) + 2 * k_of(t) * (k_of(t) + 1)
                                             / (len(rows) - k_of(t) - 1)) - 1) for t in stands)
    check("criterion of every law, greatest relative difference", worst, 0, 1e-9)


def shifts(grid_path, master_path):
    grid, master = ElementTree.parse(grid_path).getroot(), ElementTree.parse(master_path).getroot()
    temperature, log_a, log_b, noise, u_temperature = shifts_of(master)
    reference = int(np.argmin(np.abs(log_a)))
    check("log10 a_T at the reference", abs(log_a[reference]), 0, 0)
    joint = Joint(cells_of(grid), log_a, log_b, reference)
    own, u_own = joint.fit()
    free = joint.free
    parts = [[float(one(row, "log10_aT").get(name)) for name in ("u", "u_noise", "u_common")] for row in
             all_of(master, "shifts/shift")]
    check("u over both parts in quadrature, greatest difference", max(abs(u - math.hypot(a, b)) for u, a, b in parts), 0, 1e-12)
    # Another prior of smoothness on the same data: the shifts may part by a fraction of what the noise leaves open.
    check("log10 a_T, greatest difference in stated u", np.max(np.abs(own - log_a)[free] / noise[free]), 0, 0.35)
    check("stated u over own, least", np.min(noise[free] / u_own), 0.9, 1.1)
    check("stated u over own, greatest", np.max(noise[free] / u_own), 0.9, 1.1)
    check_law(master, temperature, log_a, reference, u_temperature)


# ---- handed-over spectrum ----

def spectrum(grid_path, master_path, material_path):
    cells = cells_of(ElementTree.parse(grid_path).getroot())
    temperature, log_a, log_b, _, _ = shifts_of(ElementTree.parse(master_path).getroot())
    material = ElementTree.parse(material_path).getroot()
    modes = all_of(material, "spectrum/mode")
    tau, e, weight = (np.array([value(mode, name) for mode in modes]) for name in ("relaxation_time", "modulus", "relative_weight"))
    u = np.array([float(one(mode, "modulus").get("u")) for mode in modes])
    long_term, instantaneous = value(material, "spectrum/long_term_modulus"), value(material, "spectrum/instantaneous_modulus")
    check("instantaneous less long-term less all modes, relative", abs(instantaneous - long_term - e.sum()) / instantaneous, 0, 1e-12)
    check("relative weights, greatest difference", np.max(np.abs(weight - e / instantaneous)), 0, 1e-12)
    i = cells[:, 0].astype(int)
    reduced = cells[:, 1] * 10 ** log_a[i]
    q = reduced[:, None] * tau
    model = 10 ** log_b[i] * (long_term + (e * q * (q + 1j) / (1 + q ** 2)).sum(axis=1))
    measured = cells[:, 2] + 1j * cells[:, 3]
    off = np.abs(model - measured) / np.abs(measured)
    check("misfit rms, stated over own", value(material, "spectrum/fit_error_rms") / np.sqrt(np.mean(off ** 2)), 0.98, 1.02)
    check("misfit worst, stated over own", value(material, "spectrum/fit_error_worst") / np.max(off), 0.98, 1.02)
    first, last = value(material, "valid/time_from"), value(material, "valid/time_to")
    edge = math.exp(math.pi / 2)
    # exp(pi/2)/omega_max <= tau <= exp(-pi/2)/omega_min; narrower where the data know the modulus too badly, never wider
    check("window's start over exp(pi/2)/omega_max", first * np.max(reduced) / edge, 1 - 1e-9, 100)
    check("window's end over exp(-pi/2)/omega_min", last * np.min(reduced) * edge, 0.01, 1 + 1e-9)
    check("modes whose mark is wrong", sum((mode.get("trusted") in ("true", "1")) != (first <= t <= last) for mode, t in
                                           zip(modes, tau)), 0, 0)
    covariance = np.array(one(material, "spectrum/covariance").text.split(), dtype=float)
    n = int(round(math.sqrt(len(covariance))))
    covariance = covariance.reshape(n, n)
    check("u of the modes against the covariance", np.max(np.abs(np.sqrt(np.diag(covariance))[:len(u)] / u - 1)), 0, 1e-9)
    part = covariance / np.sqrt(np.outer(np.diag(covariance), np.diag(covariance)))
    check("least eigenvalue of the correlations", np.linalg.eigvalsh(part)[0], 0, 1)
    check("coldest valid less coldest measured, K", value(material, "valid/temperature_from") - temperature[0], 0, 100)
    check("hottest measured less hottest valid, K", temperature[-1] - value(material, "valid/temperature_to"), 0, 100)


if __name__ == "__main__":
    {"moduli": moduli, "shifts": shifts, "spectrum": spectrum}[sys.argv[1]](*sys.argv[2:])
    sys.exit(1 if failures else 0)
