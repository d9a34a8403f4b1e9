#!/usr/bin/env bash
# anelast-phase: file and pipe, the same bytes twice, valid by its schema, choices taken and recorded; refusals with their
# exit codes, and nothing left behind.
. "$ANELAST_SOURCE/tests/command_line.bash"
expect_text() { grep -q -- "$2" err.txt || { fail "$1: no '$2' in the message"; cat err.txt; }; }
expect_absent() { [ ! -e "$2" ] || { fail "$1: $2 was left behind"; rm -f "$2"; }; }
run_of() { # layout, name: a run document of the made dump under another layout
    "$bin/anelast-intake" made/strip.csv --layout "$1" --specimen made/specimen.xml --apparatus made/apparatus.xml \
        --output "$2" || fail "$2"
}
export SOURCE_DATE_EPOCH=1772487600
rm -rf made *.xml
python3 "$ANELAST_SOURCE/tests/made_dump.py" made || fail "made_dump.py"
run_of made/layout.xml run.xml

expect_code 0 "a run" "$bin/anelast-phase" run.xml --output points.xml
expect_text "a run" "bursts used"
xmllint --noout --schema "$ANELAST_SOURCE/include/anelast/schema/points.xsd" points.xml 2>err.txt || fail "schema: $(cat err.txt)"
expect_code 0 "again" "$bin/anelast-phase" --quiet run.xml --output again.xml
[ ! -s err.txt ] || fail "--quiet: $(cat err.txt)"
cmp -s points.xml again.xml || fail "the same input made other bytes"
expect_code 0 "the pipe" sh -c "'$bin/anelast-phase' <run.xml >again.xml"
diff <(grep -v '<input role="run"' points.xml) <(grep -v '<input role="run"' again.xml) >/dev/null || fail "the pipe makes other points"

# A choice of the lab's is taken and stands in the document.
cat >procedure.xml <<'XML'
<?xml version="1.0" encoding="UTF-8"?>
<procedure xmlns="urn:x-anelast:documents:1" version="1.0" id="LQ-P-7">
  <choice name="snr_flag" value="150" unit="dB"/>
</procedure>
XML
expect_code 0 "a procedure" "$bin/anelast-phase" run.xml --procedure procedure.xml --output strict.xml
expect_text "a procedure" "^anelast-phase: 0 bursts used"
grep -q '<choice name="snr_flag" value="150" unit="dB"/>' strict.xml || fail "the choice is not in the record"
"$bin/anelast-phase" --show-procedure >shown.xml || fail "--show-procedure"
xmllint --noout --schema "$ANELAST_SOURCE/include/anelast/schema/procedure.xsd" shown.xml 2>err.txt || fail "procedure: $(cat err.txt)"

# Refusals: what is missing, cut short, not a run, or turned round.
expect_code 3 "missing" "$bin/anelast-phase" absent.xml --output x.xml
expect_absent "missing" x.xml
expect_code 2 "usage" "$bin/anelast-phase" run.xml --no-such-option
head -c $(($(stat -c %s run.xml) / 2)) run.xml >cut.xml
expect_code 1 "cut short" "$bin/anelast-phase" cut.xml --output x.xml
expect_absent "cut short" x.xml
expect_code 1 "not a run" "$bin/anelast-phase" points.xml --output x.xml
expect_absent "not a run" x.xml
python3 - <<'PY'
import re
text = open("made/layout.xml", encoding="utf-8").read()
force = re.search(r'<channel role="force".*?</channel>', text, re.S).group(0)
move = re.search(r'<channel role="displacement".*?</channel>', text, re.S).group(0)
column = lambda channel: re.search(r"<column>.*?</column>", channel).group(0)
swapped = text.replace(force, "@").replace(move, move.replace(column(move), column(force)))
swapped = swapped.replace("@", force.replace(column(force), column(move)))
open("swapped.xml", "w", encoding="utf-8").write(swapped)
turned = force.replace('role="force"', 'role="force" inverted="yes"')
open("turned.xml", "w", encoding="utf-8").write(text.replace(force, turned))
PY
run_of swapped.xml swapped_run.xml
expect_code 1 "swapped columns" "$bin/anelast-phase" swapped_run.xml --output x.xml
expect_text "swapped columns" "swapped"
expect_absent "swapped columns" x.xml
run_of turned.xml turned_run.xml
expect_code 1 "an inverted channel" "$bin/anelast-phase" turned_run.xml --output x.xml
expect_text "an inverted channel" "near 180 degrees"
expect_absent "an inverted channel" x.xml
exit $failed
