#!/usr/bin/env bash
# anelast-grid: files and pipes, replicates, the same bytes twice, refusals with their exit codes and nothing left behind.
. "$ANELAST_SOURCE/tests/command_line.bash"
points_of() { # folder, options of made_dump.py...
    local folder=$1
    shift
    python3 "$ANELAST_SOURCE/tests/made_dump.py" "$folder" "$@" || fail "made_dump.py $*"
    "$bin/anelast-intake" "$folder/strip.csv" --layout "$folder/layout.xml" --specimen "$folder/specimen.xml" \
        --apparatus "$folder/apparatus.xml" | "$bin/anelast-phase" --quiet --output "$folder/points.xml" || fail "points of $folder"
}
export SOURCE_DATE_EPOCH=1772487600
rm -rf one two few
points_of one
points_of two --id RP-0612-2 --seed 2 --clip
points_of few --few

# 12 isotherms 4 K apart at 7 frequencies (made_dump.py); the set temperatures are nowhere in the dump.
expect_code 0 "a grid" "$bin/anelast-grid" one/points.xml --output grid.xml
"$bin/anelast-table" grid.xml >cells.csv
[ "$(wc -l <cells.csv)" -eq 85 ] || fail "$(wc -l <cells.csv) lines of cells, expected 84 and a head"
[ "$("$bin/anelast-table" --table isotherms grid.xml | grep -c ',heating,true,')" -eq 12 ] || fail "12 steady isotherms on heating"
xmllint --noout --schema "$ANELAST_SOURCE/include/anelast/schema/grid.xsd" grid.xml 2>err.txt || fail "schema: $(cat err.txt)"
expect_code 0 "the pipe" sh -c "'$bin/anelast-grid' <one/points.xml >again.xml"
diff <(grep -v '<input role="points"' grid.xml) <(grep -v '<input role="points"' again.xml) >/dev/null || fail "the pipe makes another grid"
expect_code 0 "again" "$bin/anelast-grid" one/points.xml --output again.xml
cmp -s grid.xml again.xml || fail "the same input made other bytes"

# Loss peak of the made solid: omega tau = 1 (Cole and Cole 1941) at 1 Hz, tau = 100 s at 250 K and WLF constants 17.44 and
# 51.6 K: log10(tau / 100 s) = -2.7982 at T = 250 K + 51.6 K * 2.7982 / (17.44 - 2.7982) = 259.861 K. Allowed: 3 stated u.
"$bin/anelast-table" --table readings grid.xml | awk -F, '
    $1 == "loss peak" && $3 > 0.99 && $3 < 1.01 { u = sqrt($5^2 + $6^2 + $7^2); found = ($4 - 259.861)^2 < 9 * u^2 && u < 1 }
    END { exit !found }' || fail "loss peak at 1 Hz: $("$bin/anelast-table" --table readings grid.xml | grep 'loss peak')"

# Replicates: one grid of both, one cell each, the clipped burst's cell from the other run alone.
expect_code 0 "replicates" "$bin/anelast-grid" one/points.xml two/points.xml --output both.xml
grep -q '<scatter runs="2">' both.xml || fail "no scatter of two runs"
[ "$(grep -c 'repeats="2"' both.xml)" -eq 83 ] || fail "$(grep -c 'repeats="2"' both.xml) cells of two runs, expected 83"
[ "$(grep -c '<input role="points"' both.xml)" -eq 2 ] || fail "both inputs must be named"
expect_code 0 "assessment" "$bin/anelast-table" --table reasons both.xml
grep -q '^partial,.*before unclamping, measure again: .* 20 Hz' out.txt || fail "what to redo: $(cat out.txt)"

# A procedure of the lab: a width that no burst keeps would be a ramp of the lab's own making; a wide one joins neighbours.
cat >wide.xml <<'XML'
<?xml version="1.0" encoding="UTF-8"?>
<procedure xmlns="urn:x-anelast:documents:1" version="1.0"><choice name="isotherm_width" value="2.5" unit="K"/></procedure>
XML
expect_code 0 "procedure" "$bin/anelast-grid" one/points.xml --procedure wide.xml --output wide.grid.xml
grep -q 'name="isotherm_width" value="2.5"' wide.grid.xml || fail "the choice in force is not recorded"
[ "$(grep -c '<isotherm ' wide.grid.xml)" -lt 12 ] || fail "a width of 2.5 K joins no neighbours"

expect_code 1 "a run twice" "$bin/anelast-grid" one/points.xml two/points.xml one/points.xml --output none.xml
grep -q 'two of the points documents are of this run' err.txt || fail "message: $(cat err.txt)"
expect_code 3 "no such file" "$bin/anelast-grid" absent.xml --output none.xml
expect_code 1 "another document" "$bin/anelast-grid" grid.xml --output none.xml
grep -q '^anelast-grid: grid.xml:' err.txt || fail "message: $(cat err.txt)"
sed '/<storage /d' one/points.xml >broken.xml
expect_code 1 "invalid points" "$bin/anelast-grid" broken.xml --output none.xml
sed 's/<point burst="\([0-9]*\)" step="[0-9]*" state="[a-z]*"/<point burst="\1" state="skipped"/' few/points.xml >skipped.xml
expect_code 1 "nothing to grid" "$bin/anelast-grid" skipped.xml --output none.xml
grep -q 'no burst with a modulus is left' err.txt || fail "message: $(cat err.txt)"
expect_code 2 "wrong option" "$bin/anelast-grid" --nonsense one/points.xml
[ ! -e none.xml ] || fail "a refused grid was left behind"
exit $failed
