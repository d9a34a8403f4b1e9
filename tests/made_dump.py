#!/usr/bin/python3
"""made_dump.py FOLDER [--id ID] [--material simple|complex] [--clip] [--few] [--hold]: a small dump of a made rail pad strip in
tension with the layout, specimen and apparatus documents for it, for the tests of the command line.

In closed form and from nothing of anelast: E* of a fractional Zener solid (Cole and Cole 1941) whose times follow a WLF law
with the constants of Williams, Landel and Ferry 1955; `complex` adds a second process with an Arrhenius law. The frame's
compliance is in series. Standard library only.
"""
import argparse
import cmath
import math
import os
import random

LENGTH, WIDTH, THICKNESS = 0.012, 0.005, 0.001  # m
COMPLIANCE = 1.5e-7  # m/N
FREQUENCIES = (0.2, 0.5, 1.0, 2.0, 5.0, 10.0, 20.0)  # Hz
SAMPLES, CYCLES = 32, 8


def zener(omega_tau, low, high, width):
    x = (1j * omega_tau) ** width
    return (low + high * x) / (1 + x)


def modulus(kelvin, hertz, kind):
    omega, above = 2 * math.pi * hertz, kelvin - 250
    value = zener(omega * 100 * 10 ** (-17.44 * above / (51.6 + above)), 5e6, 1.5e9, 0.5)
    if kind == "complex":
        value += zener(omega * 1e-2 * math.exp(6000 * (1 / kelvin - 1 / 270)), 1e6, 6e8, 0.5)
    return value


def burst(rows, step, start, kelvin, hertz, options, chance):
    area_over_length = WIDTH * THICKNESS / LENGTH
    stiffness = 1 / (1 / (modulus(kelvin, hertz, options.material) * area_over_length) + COMPLIANCE)
    reach = min(4e-6, 4.0 / abs(stiffness))  # m, so that the force stays within the bench's 10 N
    offset = 1.3 * reach
    for i in range(SAMPLES * CYCLES):
        time = i / (SAMPLES * hertz)
        turn = cmath.exp(2j * math.pi * hertz * time)
        position = offset + (reach * turn).imag + chance.gauss(0, 1e-9)
        force = abs(stiffness) * offset + (stiffness * reach * turn).imag + chance.gauss(0, 2e-3)
        if options.clip and step == 7:
            # both tops cut so deep that seven samples in ten stand at an end: too little is left to fit
            middle, half = abs(stiffness) * offset, 0.45 * abs(stiffness) * reach
            force = min(max(force, middle - half), middle + half)
        rows.append(f"{step},{start + time:.6f},{position * 1e6:.4f},{force:.4f},"
                    f"{kelvin - 273.15 + chance.gauss(0, 0.02):.3f},{hertz}")
    return start + SAMPLES * CYCLES / (SAMPLES * hertz) + 2


def hold(rows, step, start, kelvin, chance):
    for i in range(200):
        time = 0.05 * i
        force = 2e-6 * modulus(kelvin, 0.2 / max(time, 0.05), "simple").real * WIDTH * THICKNESS / LENGTH
        rows.append(f"{step},{start + time:.6f},{2.0 + chance.gauss(0, 1e-3):.4f},{force + chance.gauss(0, 2e-3):.4f},"
                    f"{kelvin - 273.15:.3f},0")
    return start + 20


def document(path, text):
    with open(path, "w", encoding="utf-8") as file:
        file.write('<?xml version="1.0" encoding="UTF-8"?>\n' + text)


def documents(folder, kind):
    space = 'xmlns="urn:x-anelast:documents:1" version="1.0"'
    document(os.path.join(folder, "layout.xml"), f"""<layout {space} id="strip bench" author="Lower Quay Works" revision="1">
  <text encoding="UTF-8" separator="comma" decimal_mark="."/>
  <channels>
    <channel role="step"><column>step</column></channel>
    <channel role="time" unit="s"><column>time_s</column></channel>
    <channel role="displacement" unit="um"><column>position_um</column></channel>
    <channel role="force" unit="N"><column>force_N</column></channel>
    <channel role="temperature" unit="degC"><column>chamber_degC</column></channel>
    <channel role="set_frequency" unit="Hz"><column>set_Hz</column></channel>
  </channels>
  <bursts from="step"{kind}/>
  <corrections compliance="no" inertia="no"/>
</layout>
""")
    document(os.path.join(folder, "apparatus.xml"), f"""<apparatus {space} id="bench 2" force_at="drive">
  <compliance value="{COMPLIANCE}" unit="m/N" u="3e-9"/>
  <temperature_bias value="0" unit="K" u="0.2"/>
</apparatus>
""")


def main():
    parser = argparse.ArgumentParser()
    parser.add_argument("folder")
    parser.add_argument("--id", default="RP-0612-1")
    parser.add_argument("--material", default="simple", choices=["simple", "complex"])
    parser.add_argument("--clip", action="store_true", help="clip the force of step 7")
    parser.add_argument("--few", action="store_true", help="one isotherm only")
    parser.add_argument("--hold", action="store_true", help="relaxation holds instead of bursts")
    parser.add_argument("--seed", type=int, default=1)
    options = parser.parse_args()
    os.makedirs(options.folder, exist_ok=True)
    chance, rows, step, start = random.Random(options.seed), ["step,time_s,position_um,force_N,chamber_degC,set_Hz"], 0, 300.0
    for i in range(1 if options.few else 12):
        kelvin = 248 + 4 * i + chance.uniform(-0.15, 0.15)
        for hertz in (0,) if options.hold else FREQUENCIES:
            step += 1
            if options.hold:
                start = hold(rows, step, start, kelvin, chance)
            else:
                start = burst(rows, step, start, kelvin, hertz, options, chance)
        start += 300
    with open(os.path.join(options.folder, "strip.csv"), "w", encoding="utf-8") as file:
        file.write("\n".join(rows) + "\n")
    documents(options.folder, ' kind="hold"' if options.hold else "")
    document(os.path.join(options.folder, "specimen.xml"),
             f"""<specimen xmlns="urn:x-anelast:documents:1" version="1.0" id="{options.id}" material="rail pad compound 22" lot="0612">
  <geometry kind="tension">
    <length value="{LENGTH * 1e3}" unit="mm" u="0.05"/>
    <width value="{WIDTH * 1e3}" unit="mm" u="0.02"/>
    <thickness value="{THICKNESS * 1e3}" unit="mm" u="0.005"/>
  </geometry>
</specimen>
""")


if __name__ == "__main__":
    main()
