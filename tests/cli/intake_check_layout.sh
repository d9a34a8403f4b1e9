#!/bin/bash
# A layout's self-test: met as it stands, and each change that reads the excerpt otherwise is found and named.
. "$ANELAST_SOURCE/tests/command_line.bash"
layout=$ANELAST_SOURCE/fixtures/lower_quay/rail_pad/layout.xml

"$ANELAST_BIN/anelast-intake" --check-layout "$layout" >out.txt 2>err.txt || fail "the layout as it stands: $(cat err.txt)"
grep -q "2 bursts in the excerpt, 11 expectations met" out.txt || fail "$(cat out.txt)"

# broken SED TEXT: the layout changed by SED fails its test with TEXT.
broken() {
    sed "$1" "$layout" >changed.xml
    "$ANELAST_BIN/anelast-intake" --check-layout changed.xml >out.txt 2>err.txt
    [ $? = 1 ] || fail "$1: exit code is not 1: $(cat err.txt)"
    grep -qF -- "$2" err.txt || fail "$1: '$2' is not said: $(cat err.txt)"
    [ -s out.txt ] && fail "$1: $(cat out.txt)"
}
broken 's/role="force" unit="N"/& inverted="yes"/' "got 5.7884 N, expected -5.7884 N"
broken 's/role="displacement" unit="um"/role="displacement" unit="mm"/' "displacement: the dump says unit 'um', the layout 'mm'"
broken 's/<bursts from="step"/<bursts from="whole"/' "got 0, expected 1"
broken 's/self_test bursts="2"/self_test bursts="3"/' "2 bursts found in the excerpt, expected 3"
broken 's/name="thickness" unit="mm"/name="thickness" unit="cm"/' "got 0.0151 m, expected 0.00151 m"
broken 's/zone="+01:00"/zone="Z"/' "got '2026-01-02T06:05:00Z', expected '2026-01-02T06:05:00+01:00'"
broken 's/<expect burst="2" role="set_frequency"/<expect burst="4" role="set_frequency"/' "11 expectations, of which 10"
broken 's/sample="3" role="force"/sample="4" role="force"/' "sample 4 of force is not there"
broken 's/decimal_mark="."/decimal_mark="," footer="x"/; s/separator="comma"/separator="semicolon"/' "no row names the columns"
broken '/<self_test/,/<\/self_test>/d' "the layout has no self_test to run"
exit $failed
