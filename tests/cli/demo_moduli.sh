#!/bin/bash
# The demo lab's dumps against the closed forms that they were made of (fixtures/make_dumps.py, which shares nothing with the
# programs): moduli of every burst, in tension and as a cantilever, from text and from counts, as one pipe.
set -u
lab=$ANELAST_SOURCE/fixtures/lower_quay
failed=0
for dump in rail_pad/RP-0522-1.csv hull_laminate/HL-0140.bin; do
    folder=$lab/$(dirname "$dump")
    "$ANELAST_BIN/anelast-intake" "$lab/$dump" -l "$folder/layout.xml" -s "$folder/specimen.xml" -a "$folder/apparatus.xml" |
        "$ANELAST_BIN/anelast-phase" -q | "$ANELAST_BIN/anelast-table" >"$(basename "$dump").csv" || failed=1
done
[ $failed = 0 ] || exit 1
python3 - "$ANELAST_SOURCE/fixtures" <<'X'
import csv
import math
import statistics
import sys

sys.dont_write_bytecode = True
sys.path.insert(0, sys.argv[1])
import make_dumps

failed = False
for table, material, n in (("RP-0522-1.csv.csv", make_dumps.PAD, 66), ("HL-0140.bin.csv", make_dumps.RESIN, 70)):
    normalised, relative = [], []
    for row in csv.DictReader(open(table)):
        truth = material.modulus(float(row["frequency_Hz"]), float(row["temperature_K"]))
        for name, true in (("storage", truth.real), ("loss", truth.imag)):
            error = float(row[name + "_Pa"]) - true
            u = math.hypot(float(row[f"u_noise_{name}_Pa"]), float(row[f"u_common_{name}_Pa"]))
            normalised.append(abs(error / u))
            relative.append(abs(error / true))
    within = sum(z <= 4 for z in normalised) / (2 * n)
    median = statistics.median(relative)
    print(f"{table}: {len(relative) // 2} bursts, {100 * within:.1f} % within 4 u, median error {100 * median:.4f} %")
    # 4 u and 0.2 %: what is asked of the main job on dumps of known truth
    failed |= len(relative) != 2 * n or not within >= 0.99 or not median < 0.002
sys.exit(failed)
X
