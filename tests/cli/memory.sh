#!/usr/bin/env bash
# anelast-intake and anelast-phase need memory for the largest burst, not for the dump: forty times as many bursts of the
# same length may add their points, and no more.
set -u
if ldd "$ANELAST_BIN/anelast-phase" | grep -q libasan; then
    echo "the sanitizer keeps what was freed: its memory says nothing"
    exit 77
fi
rm -rf made *.xml
python3 "$ANELAST_SOURCE/tests/made_dump.py" made || exit 1
export SOURCE_DATE_EPOCH=1772487600
python3 - "$ANELAST_BIN" <<'PY'
import os
import subprocess
import sys

TIMES = 40
# The samples alone of 39 more dumps of 21504 rows in 4 channels are 26 MiB as doubles, the text 34 MiB. A point with its
# remarks takes about 1 KiB, and there are 39 * 84 more of them: 3.2 MiB. 8 MiB lies between, with room for the allocator.
ALLOWED_KIB = 8 * 1024


def peak_kib(*command):
    child = subprocess.Popen(command)
    _, status, usage = os.wait4(child.pid, 0)
    if status:
        sys.exit(f"FAIL {command[0]}: wait status {status}")
    return usage.ru_maxrss


def lengthen(short, long):
    with open(short, encoding="ascii") as source:
        head, *rows = source.read().splitlines()
    rows = [row.split(",", 2) for row in rows]
    steps, span = int(rows[-1][0]), float(rows[-1][1]) + 300
    with open(long, "w", encoding="ascii") as target:
        target.write(head + "\n")
        for k in range(TIMES):
            target.writelines(f"{int(step) + k * steps},{float(time) + k * span:.6f},{rest}\n" for step, time, rest in rows)


def peaks(name):
    run = f"{name}.run.xml"
    return (peak_kib(f"{programs}/anelast-intake", f"made/{name}.csv", "--layout", "made/layout.xml", "--specimen",
                     "made/specimen.xml", "--apparatus", "made/apparatus.xml", "--output", run),
            peak_kib(f"{programs}/anelast-phase", run, "--quiet", "--output", f"{name}.points.xml"))


programs = sys.argv[1]
# The measure itself must see as much as a stage that held all samples would add.
idle = peak_kib(sys.executable, "-c", "pass")
if peak_kib(sys.executable, "-c", "kept = b'x' * (26 << 20)") - idle < 2 * ALLOWED_KIB:
    sys.exit("FAIL the measure of memory does not see 26 MiB")
lengthen("made/strip.csv", "made/long.csv")
short, long = peaks("strip"), peaks("long")
points = open("long.points.xml", encoding="utf-8").read().count("<point ")
if points != TIMES * 84:
    sys.exit(f"FAIL {points} points of the long dump, expected {TIMES * 84}")
grown = [(name, b - a) for name, a, b in zip(("anelast-intake", "anelast-phase"), short, long) if b - a > ALLOWED_KIB]
if grown:
    sys.exit(f"FAIL memory grows with the dump: {grown} KiB, allowed {ALLOWED_KIB}")
PY
ended=$?
rm -rf made *.xml
exit $ended
