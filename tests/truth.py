#!/usr/bin/python3
"""truth.py KIND ... : hold reduced dumps against the truth of the independent virtual bench that made them.

The dumps, their truth files and what the bench is stand beside the project (shared/dumps); the bench shares nothing
with anelast. Limits are those agreed for the product; each is named where it is checked. Standard library and NumPy.

  truth.py moduli  POINTS.csv TRUTH.json            E', E'' of every burst
  truth.py shifts  MASTER.csv TRUTH.json [--rms R]  log10 a_T, with their stated uncertainty
  truth.py wlf     LAWS.csv MASTER.xml TRUTH.json   constants after change of reference
  truth.py modulus_of_time MATERIAL.xml TRUTH.json  E(t) of the handed-over spectrum in its trusted window
"""
import csv
import json
import sys
import xml.etree.ElementTree as ElementTree

import numpy as np

NAMESPACE = "{urn:x-anelast:documents:1}"
failures = []


def check(name, value, lowest, highest):
    """One line a check; written so that NaN fails."""
    good = lowest <= value <= highest
    print(f"{'ok' if good else 'FAIL'}  {name}: {value:.5g} (allowed {lowest:g} .. {highest:g})")
    if not good:
        failures.append(name)


def rows(path):
    with open(path, newline="", encoding="utf-8") as file:
        return list(csv.DictReader(file))


def column(table, name):
    return np.array([float(row[name]) if row[name] != "" else np.nan for row in table])


def truth_of(path):
    with open(path, encoding="utf-8") as file:
        return json.load(file)


def moduli(points_path, truth_path):
    table, truth = rows(points_path), truth_of(truth_path)
    by_number = {burst["n"]: burst for burst in truth["bursts"]}
    check("bursts found", len(table), len(by_number), len(by_number))
    table = [row for row in table if row["storage_Pa"] != ""]
    check("bursts with a modulus", len(table), len(by_number), len(by_number))
    bursts = [by_number[int(row["burst"])] for row in table]
    total, noise, relative = [], [], []
    for name in ("storage", "loss"):
        true = np.array([burst[f"{name}_Pa"] for burst in bursts])
        error = column(table, f"{name}_Pa") - true
        u_noise, u_common = column(table, f"u_noise_{name}_Pa"), column(table, f"u_common_{name}_Pa")
        total.append(error / np.hypot(u_noise, u_common))
        noise.append(error / u_noise)
        relative.append(np.abs(error) / true)
        print(f"    {name}: rms of error / noise {np.sqrt(np.mean(noise[-1] ** 2)):.3f}, mean {np.mean(noise[-1]):+.3f},"
              f" median relative error {np.median(relative[-1]):.2e}")
    total, noise, relative = np.concatenate(total), np.concatenate(noise), np.concatenate(relative)
    check("fraction within 4 standard uncertainties", np.mean(np.abs(total) <= 4), 0.99, 1)
    check("fraction within 4 noise uncertainties", np.mean(np.abs(noise) <= 4), 0.99, 1)
    check("median relative error", np.median(relative), 0, 0.002)
    check("spread of normalised errors", np.sqrt(np.mean(noise ** 2)), 0.7, 1.4)
    found = column(table, "frequency_Hz") / np.array([burst["f_Hz"] for burst in bursts]) - 1
    check("greatest relative error of frequency", np.max(np.abs(found)), 0, 1e-3)


def true_shift(truth):
    """Temperatures and log10 a_T of the truth, one row an isotherm, and a function of temperature between them."""
    pairs = sorted({(burst["T_K"], burst["log10_aT"]) for burst in truth["bursts"]})
    temperature, shift = np.array(pairs).T
    # 4th-order local interpolation would do too; log a_T is smooth and the isotherms' own temperatures are the knots
    return lambda at: np.interp(at, temperature, shift), temperature, shift


def shifts(master_path, truth_path, rms_limit=None):
    table, truth = rows(master_path), truth_of(truth_path)
    temperature, found, stated = (column(table, name) for name in ("temperature_K", "log10_aT", "u_log10_aT"))
    _, true_temperature, true_log = true_shift(truth)
    check("isotherms found", len(temperature), len(true_temperature), len(true_temperature))
    nearest = np.array([np.argmin(np.abs(true_temperature - t)) for t in temperature])
    check("greatest temperature error, K", np.max(np.abs(true_temperature[nearest] - temperature)), 0, 0.05)
    at_reference = np.argmin(np.abs(found))
    error = (found - found[at_reference]) - (true_log[nearest] - true_log[nearest[at_reference]])
    others = np.arange(len(found)) != at_reference
    for t, e, u in zip(temperature, error, stated):
        print(f"    {t:8.3f} K  error {e:+.5f}  stated {u:.5f}")
    if rms_limit is not None:
        check("log10 a_T, rms error in decades", np.sqrt(np.mean(error[others] ** 2)), 0, rms_limit)
    else:
        check("log10 a_T, spread of normalised errors", np.sqrt(np.mean((error[others] / stated[others]) ** 2)), 0.7, 1.5)
        sure = others & (stated < 0.02)
        check("isotherms whose stated uncertainty is below 0.02", np.sum(sure), 1, len(found))
        check("log10 a_T of these, rms error in decades", np.sqrt(np.mean(error[sure] ** 2)), 0, 0.02)


def wlf(master_path, truth_path):
    """The truth's log10 a_T lies on a WLF law about its own reference; ours is moved there and compared."""
    truth = truth_of(truth_path)
    _, temperature, shift = true_shift(truth)
    reference = 263.15  # K, the rail pad's own (README of the dumps)
    difference = temperature - reference
    # log a (c2 + dT) = -c1 dT is linear in (c1, c2)
    matrix = np.column_stack([-difference, -shift])
    c1_true, c2_true = np.linalg.lstsq(matrix, shift * difference, rcond=None)[0]
    master = ElementTree.parse(master_path).getroot()
    chosen = [trial for trial in master.iter(NAMESPACE + "trial") if trial.get("chosen") in ("1", "true")]
    check("laws chosen", len(chosen), 1, 1)
    law = chosen[0].find(NAMESPACE + "law")
    print("    law chosen:", law.get("kind"))
    if law.get("kind") != "wlf":
        failures.append("law chosen is not wlf")
        return
    constant = {item.get("name"): (float(item.get("value")), float(item.get("u"))) for item in law.iter(NAMESPACE + "constant")}
    t0 = float(law.find(NAMESPACE + "reference_temperature").get("value"))
    (c1, u1), (c2, u2) = constant["c1"], constant["c2"]
    # truth moved to our reference: c2' = c2 + (T0' - T0), c1' = c1 c2 / c2'
    c2_here = c2_true + t0 - reference
    c1_here = c1_true * c2_true / c2_here
    print(f"    at {t0:.3f} K: c1 {c1:.4f} +- {u1:.4f} (true {c1_here:.4f}), c2 {c2:.3f} +- {u2:.3f} K (true {c2_here:.3f})")
    check("c1, error over stated uncertainty", abs(c1 - c1_here) / u1, 0, 3)
    check("c2, error over stated uncertainty", abs(c2 - c2_here) / u2, 0, 3)
    check("c1, relative error", abs(c1 / c1_here - 1), 0, 0.02)
    check("c2, relative error", abs(c2 / c2_here - 1), 0, 0.02)


def equilibrium_of(truth):
    """The long-term modulus at the material's own reference; where the truth does not name it, what the modes leave of the
    bursts' E' (hull laminate: moduli scale with T / 343.15 K)."""
    if truth["equilibrium_Pa"] is not None:
        return truth["equilibrium_Pa"]
    times, strengths = np.array(truth["mode_time_s"]), np.array(truth["mode_strength_Pa"])
    left = []
    for burst in truth["bursts"]:
        q = 2 * np.pi * burst["f_Hz"] * 10 ** burst["log10_aT"] * times
        left.append(burst["storage_Pa"] / (burst["T_K"] / 343.15) - np.sum(strengths * q ** 2 / (1 + q ** 2)))
    return float(np.median(left))


def modulus_of_time(material_path, truth_path):
    truth = truth_of(truth_path)
    material = ElementTree.parse(material_path).getroot()
    value = lambda name: float(material.find(".//" + NAMESPACE + name).get("value"))
    t0 = value("reference_temperature")
    log_a, _, _ = true_shift(truth)
    scale = t0 / 343.15 if truth["meta"]["specimen"].startswith("HL") else 1.0  # hull laminate: b_T = T / 343.15 K
    times = np.array([float(mode.find(NAMESPACE + "relaxation_time").get("value")) for mode in material.iter(NAMESPACE + "mode")])
    moduli_ = np.array([float(mode.find(NAMESPACE + "modulus").get("value")) for mode in material.iter(NAMESPACE + "mode")])
    lowest, highest = value("time_from"), value("time_to")
    t = np.logspace(np.log10(lowest), np.log10(highest), 200)
    found = value("long_term_modulus") + np.exp(-t[:, None] / times) @ moduli_
    true_times = np.array(truth["mode_time_s"]) * 10 ** log_a(t0)
    true = scale * (equilibrium_of(truth) + np.exp(-t[:, None] / true_times) @ np.array(truth["mode_strength_Pa"]))
    print(f"    window {lowest:.3g} .. {highest:.3g} s at {t0:.2f} K, {len(times)} modes")
    check("width of the window, decades", np.log10(highest / lowest), 3, 40)
    check("E(t), greatest relative error in the window", np.max(np.abs(found / true - 1)), 0, 0.01)


if __name__ == "__main__":
    kind, arguments = sys.argv[1], sys.argv[2:]
    if "--rms" in arguments:
        at = arguments.index("--rms")
        shifts(*arguments[:at], rms_limit=float(arguments[at + 1]))
    else:
        {"moduli": moduli, "shifts": shifts, "wlf": wlf, "modulus_of_time": modulus_of_time}[kind](*arguments)
    sys.exit(1 if failures else 0)
