#!/usr/bin/env bash
# The main job on the dumps of the independent virtual bench, held against its truth (tests/truth.py names the limits).
set -u
dumps=$ANELAST_SOURCE/../shared/dumps
[ -d "$dumps" ] || { echo "skipped: the shared dumps do not stand beside the project"; exit 77; }
export SOURCE_DATE_EPOCH=1775000000
failed=0
run() {
    echo "-- $*"
    "$@" || { echo "FAILED: $*"; failed=1; }
}
table() { "$ANELAST_BIN/anelast-table" "$@"; }
truth() { run /usr/bin/python3 "$ANELAST_SOURCE/tests/truth.py" "$@"; }

rm -rf out
bash "$ANELAST_SOURCE/tests/shared.sh" out || failed=1

for name in rail_pad hull_laminate hull_laminate-counts two_phase; do
    table out/$name/points.xml >$name.points.csv || failed=1
    truth moduli $name.points.csv "$dumps/${name%-counts}.truth.json"
done

# rail pad: shifts, law, spectrum
table out/rail_pad/master.xml >rail_pad.master.csv || failed=1
truth shifts rail_pad.master.csv "$dumps/rail_pad.truth.json" --rms 0.005
truth wlf out/rail_pad/master.xml "$dumps/rail_pad.truth.json"
truth modulus_of_time out/rail_pad/material.xml "$dumps/rail_pad.truth.json"

# hull laminate, text and counts: the vertical law b_T = T / T0, and free vertical shifts
for name in hull_laminate hull_laminate-counts; do
    for vertical in density-temperature free; do
        procedure=$name.$vertical.procedure.xml
        cat >"$procedure" <<XML
<procedure xmlns="urn:x-anelast:documents:1" version="1.0"><choice name="vertical" value="$vertical"/></procedure>
XML
        run "$ANELAST_BIN/anelast-shift" out/$name/grid.xml --procedure "$procedure" --output $name.$vertical.master.xml
        table $name.$vertical.master.xml >$name.$vertical.master.csv || failed=1
        truth shifts $name.$vertical.master.csv "$dumps/hull_laminate.truth.json"
    done
    run "$ANELAST_BIN/anelast-prony" $name.density-temperature.master.xml --output $name.material.xml
    truth modulus_of_time $name.material.xml "$dumps/hull_laminate.truth.json"
done

# two phases: superposition does not apply, and no spectrum is handed over without the override
run grep -q '<superposition[^>]*verdict="complex"' out/two_phase/master.xml
run test ! -e out/two_phase/material.xml
"$ANELAST_BIN/anelast-prony" out/two_phase/master.xml --output two_phase.material.xml 2>two_phase.err
run test $? -eq 1
run test ! -e two_phase.material.xml
run grep -q 'complex' two_phase.err

# every document made and every one written for the dumps is valid, by a validator of its own
find out -mindepth 3 -type f -name '*.xml' >documents.txt
while read -r document; do
    root=$(basename "$document" .xml)
    xmllint --nonet --noout --schema "$ANELAST_SOURCE/include/anelast/schema/$root.xsd" "$document" 2>&1
done <documents.txt | grep -v ' validates$' >invalid.txt
cat invalid.txt
run test ! -s invalid.txt
run test "$(wc -l <documents.txt)" -eq 39 # 4 x 5 less one material, 2 runs of holds and pulls, 6 x 3 written

# the same bytes again
rm -rf again
bash "$ANELAST_SOURCE/tests/shared.sh" again >/dev/null || failed=1
run diff -r out again
exit $failed
