#!/usr/bin/env bash
# The line's numbers by another way: tests/independent.py reduces the samples of the run documents anew with NumPy and SciPy,
# for the demo lab's dumps always, for the shared dumps where they stand beside the project.
set -u
lab=$ANELAST_SOURCE/fixtures/lower_quay
failed=0
again() {
    echo "-- $*"
    /usr/bin/python3 -B "$ANELAST_SOURCE/tests/independent.py" "$@" || failed=1
}

for dump in rail_pad/RP-0522-1.csv hull_laminate/HL-0140.bin; do
    folder=$lab/$(dirname "$dump") name=$(basename "$dump")
    "$ANELAST_BIN/anelast-intake" "$lab/$dump" -l "$folder/layout.xml" -s "$folder/specimen.xml" -a "$folder/apparatus.xml" \
        -o "$name.run.xml" && "$ANELAST_BIN/anelast-phase" -q "$name.run.xml" -o "$name.points.xml" || failed=1
    again moduli "$name.run.xml" "$name.points.xml"
done

# the pad superposes; the resin's isotherms lie too far apart
name=RP-0522-1.csv
"$ANELAST_BIN/anelast-grid" "$name.points.xml" -o grid.xml && "$ANELAST_BIN/anelast-shift" grid.xml -o master.xml &&
    "$ANELAST_BIN/anelast-prony" master.xml -o material.xml || failed=1
again shifts grid.xml master.xml
again spectrum grid.xml master.xml material.xml

dumps=$ANELAST_SOURCE/../shared/dumps
if [ -d "$dumps" ]; then
    rm -rf out
    bash "$ANELAST_SOURCE/tests/shared.sh" out >/dev/null || failed=1
    for name in rail_pad hull_laminate hull_laminate-counts two_phase; do
        again moduli out/$name/run.xml out/$name/points.xml
    done
    for name in rail_pad hull_laminate; do
        again shifts out/$name/grid.xml out/$name/master.xml
        again spectrum out/$name/grid.xml out/$name/master.xml out/$name/material.xml
    done
fi
exit $failed
