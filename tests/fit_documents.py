#!/usr/bin/env python3
"""fit_documents.py DOCUMENT TRUTH.json: a written document with the constants of a bench put in.

The documents in tests/shared/ were written for one dump of each kind. Another dump of the same kind, from a bench and a
specimen with other constants, is reduced with the same documents in which only those constants differ: dimensions, compliance,
mass, delay, marks of the specimen. They come from the dump's truth; what the truth does not say stays as it was written.
For the dumps that the documents were written for nothing changes, not a byte.
"""
import json
import re
import sys
from decimal import Decimal

KINDS = {"tension": "tension", "three-point bending": "bending, three-point", "single cantilever": "cantilever, guided end",
         "dual cantilever": "cantilever, dual"}
PER_SI = {"mm": 1000, "m": 1, "g": 1000, "kg": 1, "us": 1000000, "s": 1, "m/N": 1}


def write(number):
    """A decimal as people write it: plain where that is short, else with an exponent."""
    number = number.normalize()
    exponent = number.adjusted()
    if number == 0 or -4 <= exponent <= 6:
        return format(number, "f")
    mantissa = format(number.scaleb(-exponent).normalize(), "f")
    return f"{mantissa}e{exponent}"


def constants(truth):
    """What the truth gives, by element: SI values as decimals, which keeps the digits that were printed."""
    meta, bench = truth.get("meta") or {}, truth.get("bench")
    found = {}
    for name in ("length", "width", "thickness"):
        value = meta.get(name, truth.get(f"{name}_m"))
        if value is not None:
            found[name] = Decimal(repr(value))
    if bench is not None:
        for name, key in (("compliance", "compliance"), ("moving_mass", "mass"), ("delay", "skew")):
            found[name] = Decimal(repr(bench.get(key, 0)))
    return found


def put_value(element, value):
    """The element's value; its uncertainty stays as written (the constants of a virtual bench are exact)."""
    unit = re.search(r'unit="([^"]*)"', element).group(1)
    in_unit = value * PER_SI[unit]
    return re.sub(r'value="[^"]*"', f'value="{write(in_unit)}"', element, count=1)


def fit(text, truth):
    for name, value in constants(truth).items():
        pattern = rf'<{name} [^>]*value="[^"]*"[^>]*/>'
        text = re.sub(pattern, lambda found: put_value(found.group(0), value), text)
    meta = truth.get("meta") or {}
    for attribute, key in (("id", "specimen"), ("material", "material"), ("lot", "lot"), ("started", "date")):
        if key in meta:
            text = re.sub(rf'(<specimen [^>]*\b{attribute}=")[^"]*(")', lambda found: found.group(1) + meta[key] + found.group(2),
                          text, count=1)
    if meta.get("geometry") in KINDS:
        text = re.sub(r'(<geometry kind=")[^"]*(")', lambda found: found.group(1) + KINDS[meta["geometry"]] + found.group(2), text)
    return text


def main():
    if len(sys.argv) != 3:
        sys.exit("usage: fit_documents.py DOCUMENT TRUTH.json")
    with open(sys.argv[1], encoding="utf-8", newline="") as document, open(sys.argv[2], encoding="utf-8") as truth:
        sys.stdout.reconfigure(encoding="utf-8", newline="")
        sys.stdout.write(fit(document.read(), json.load(truth)))


if __name__ == "__main__":
    main()
