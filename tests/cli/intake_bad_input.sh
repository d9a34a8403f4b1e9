#!/bin/bash
# Bad dumps: each gives its message with program, file, line and what is allowed, its exit code, and no output file; what can
# be saved of a cut dump is saved, and held. The dumps are pieces of the demo lab's, each broken in one way.
. "$ANELAST_SOURCE/tests/command_line.bash"
lab=$ANELAST_SOURCE/fixtures/lower_quay
pads=$lab/rail_pad
laminates=$lab/hull_laminate
rm -rf work && mkdir work && cd work || exit 1

# The first four bursts of a good dump: 12 lines of head, 1 of units, 128 rows a burst.
head -n 525 "$pads/RP-0522-1.csv" >good.csv

take() {
    "$ANELAST_BIN/anelast-intake" "$1" --layout "${layout:-$pads/layout.xml}" --specimen "${specimen:-$pads/specimen.xml}" \
        --apparatus "${apparatus:-$pads/apparatus.xml}" -o out.xml >out.txt 2>err.txt
}

# refuse CODE DUMP TEXT...: taking DUMP in ends with CODE, says each TEXT, and leaves no file.
refuse() {
    local code=$1 dump=$2 got text
    shift 2
    take "$dump"
    got=$?
    [ "$got" = "$code" ] || fail "$dump: exit code $got, expected $code: $(cat err.txt)"
    for text in "anelast-intake: " "$@"; do
        grep -qF -- "$text" err.txt || fail "$dump: '$text' is not said: $(cat err.txt)"
    done
    [ -s out.txt ] && fail "$dump: something on standard output"
    [ -z "$(find . -name '*out.xml*')" ] || fail "$dump: left behind: $(find . -name '*out.xml*')"
    rm -f ./*out.xml*
}

# accept DUMP TEXT...: taking DUMP in ends with 0, and the document says each TEXT.
accept() {
    local dump=$1 text
    shift
    take "$dump" || fail "$dump: refused: $(cat err.txt)"
    for text in "$@"; do
        grep -qF -- "$text" out.xml || fail "$dump: the document does not say '$text': $(grep -o '<remark.*' out.xml)"
    done
    rm -f out.xml
}

accept good.csv '<end bursts="4"/>' 'id="RP-0522-1_2026-03-22T214000"' 'started="2026-03-22T21:40:00+01:00"'
grep -q . err.txt && fail "good.csv: something on standard error: $(cat err.txt)"

# names of runs are safe as names of files, whatever they are made of
name_of() { "$ANELAST_BIN/anelast-intake" good.csv -l "$pads/layout.xml" -s "$pads/specimen.xml" "$@" | sed -n 's/^<run .* id="\([^"]*\)".*/\1/p'; }
[ "$(name_of --run-id '../night 7')" = "_.-night-7" ] || fail "--run-id: $(name_of --run-id '../night 7')"
sed '2s/RP-0522-1/RP 1\/2/' good.csv >odd.csv && sed -i '6d' odd.csv
accept odd.csv 'id="RP-1-2_odd"'

# files that are not there
refuse 3 absent.csv "absent.csv: "
layout=absent.xml refuse 3 good.csv "absent.xml: "
specimen=absent.xml refuse 3 good.csv "absent.xml: "
cp "$laminates/HL-0140.bin" alone.bin
layout=$laminates/layout.xml specimen=$laminates/specimen.xml refuse 3 alone.bin "alone.txt: "

# columns and keys
sed '12s/Oven/Oven,Humidity/; 13s/$/,1/; 14,$s/$/,41/' good.csv >unmapped.csv
refuse 1 unmapped.csv "unmapped.csv:12: " "columns that are not mapped: 'Humidity'"
sed '12s/Load/Pull/' good.csv >renamed.csv
refuse 1 renamed.csv "renamed.csv:12: " "no column for force ('Load')" "'Pull'"
sed '4s/Lot/Batch/' good.csv >key.csv
refuse 1 key.csv "key.csv:4: " "maps no key 'Batch' (line 4)"
sed '12s/,/;/g' good.csv >separator.csv
refuse 1 separator.csv "separator.csv: no row names the columns 'Step', 'Time', 'Position', 'Load'"
sed '100s/$/,7/' good.csv >ragged.csv
refuse 1 ragged.csv "ragged.csv:100: " "7 fields where the header row names 6 columns"
awk -F, 'NR == 100 { print $1 "," $2; next } 1' good.csv >short_row.csv
refuse 1 short_row.csv "short_row.csv:100: " "2 fields where the header row names 6 columns"
(cat good.csv; echo "End of test") >footer.csv
refuse 1 footer.csv "footer.csv:526: 1 field where" "the layout's 'footer' can say"
sed '1,11s/^/X/' good.csv >keys.csv
refuse 1 keys.csv "keys.csv:1: the layout maps no key 'XLower Quay Works' (line 1)" "and 6 more; is this dump of another layout?"

# units
sed '13s/,N,/,kN,/' good.csv >factor.csv
refuse 1 factor.csv "factor.csv:13: force: the dump says unit 'kN', the layout 'N'"
sed '13s/,N,/,mm,/' good.csv >dimension.csv
refuse 1 dimension.csv "dimension.csv:13: force: the dump says unit 'mm', which is no unit of force"
sed '8s/15.02/15.02 kg/' good.csv >mass.csv
refuse 1 mass.csv "mass.csv:8: " "'Free length [mm]'" "kg"

# numbers
awk -F, -v OFS=, 'NR == 300 { $4 = "1;2" } 1' good.csv >text.csv
refuse 1 text.csv "text.csv:300: step 3: force '1;2' is not a number (column 4 'Load')"
awk -F, -v OFS=, 'NR == 300 { $4 = "4.12V" } 1' good.csv >unit.csv
refuse 1 unit.csv "unit.csv:300: step 3: force '4.12V' is not a number (column 4 'Load')"
sed '14,$s/,/;/g; 14,$s/\./,/g; 12,13s/,/;/g; 1,11s/,/;/' good.csv >comma.csv
sed 's/separator="comma"/separator="semicolon"/' "$pads/layout.xml" >semicolon.xml
layout=semicolon.xml refuse 1 comma.csv "comma.csv:14: step 1: " "is not a number" "the layout's decimal mark is '.'"
sed '8s/15.02/about 15/' good.csv >about.csv
refuse 1 about.csv "about.csv:8: " "'about 15' is not a number"
sed '6s/22.03/2203/' good.csv >date.csv
refuse 1 date.csv "date.csv:6: started: '2203.2026 21:40' is no date and time of the form"

# the specimen
sed '10d' good.csv >thickness.csv
refuse 1 thickness.csv "thickness.csv: specimen: thickness is not given"
sed '8s/15.02/15020000/' good.csv >long.csv
refuse 1 long.csv "specimen: length 15020 m is outside"

sed '2s/RP-0522-1/RP-\x1b[31m1/' good.csv >escape.csv
refuse 1 escape.csv "escape.csv:2: 'Specimen': a control character stands in the value"
grep -q $'\x1b' err.txt && fail "escape.csv: a control character reaches the terminal"
sed 's/<specimen /<specimen id="RP-0417-2" /' "$pads/specimen.xml" >another.xml
specimen=another.xml accept good.csv 'code="specimen-disagrees" severity="hold"' "the dump is of specimen 'RP-0522-1'"

sed 's/<geometry>/<geometry kind="cantilever, guided end">/' "$pads/specimen.xml" >clamped.xml
specimen=clamped.xml accept good.csv 'code="geometry-disagrees" severity="hold"' "the dump says geometry 'tension'"
sed 's/u="0.05"/u="50"/' "$pads/specimen.xml" >doubtful.xml
specimen=doubtful.xml refuse 1 good.csv "the standard uncertainty of length, 0.05 m, is more than half of its 0.01502 m"
sed 's/unit="us"/unit="s"/' "$pads/apparatus.xml" >late.xml
apparatus=late.xml refuse 1 good.csv "late.xml:3: force: delay 12 s is outside -0.1 .. 0.1 s; check the unit"
sed 's/unit="g"/unit="kg"/' "$pads/apparatus.xml" >heavy.xml
apparatus=heavy.xml refuse 1 good.csv "heavy.xml:10: moving_mass: 34 kg is outside 0 .. 20 kg; check the unit"
sed 's/force_at="drive"/force_at="top"/' "$pads/apparatus.xml" >top.xml
apparatus=top.xml refuse 1 good.csv "top.xml:2: " "'force_at': The value 'top' is not an element of the set {'drive', 'fixed end'}"
grep -q facet err.txt && fail "top.xml: the library's own words: $(cat err.txt)"

# what is no file
mkdir folder
refuse 3 folder "folder: cannot be read: it is a folder, no dump"
refuse 2 - "a dump cannot come from standard input: name its file"
mkfifo pipe.csv
refuse 3 pipe.csv "pipe.csv: cannot be read: it is a pipe or a device; a dump has to be a file"

# encodings
printf 'Operator,Pr\374fer\n' | cat - good.csv >latin.csv
refuse 1 latin.csv "latin.csv:1: bytes that are no UTF-8"
iconv -f UTF-8 -t UTF-16 good.csv >wide.csv
refuse 1 wide.csv "a mark of UTF-16 stands at its beginning"
printf '\0\0\0\0' | cat good.csv - >zero.csv
refuse 1 zero.csv "zero.csv:526: a zero byte"
: >empty.csv
refuse 1 empty.csv "empty.csv: the dump is empty"
head -n 13 good.csv >headonly.csv
refuse 1 headonly.csv "headonly.csv: no row of samples"

# a step column that does not part the bursts
awk -F, -v OFS=, 'NR > 13 { $1 = 1 } 1' good.csv >steps.csv
accept steps.csv 'code="burst-unclear" severity="skip" burst="1"' "the set frequency changes within the burst, at sample 129"

# cut dumps: the complete bursts stay, the last is to be skipped, the run is held
head -c -30 good.csv >cut.csv
accept cut.csv '<end bursts="4">' 'code="truncated" severity="skip" burst="4"' 'code="truncated" severity="hold"' \
    "the dump ends within a row at line 525, 127 samples into burst 4; 3 bursts are complete"
grep -qF "cut.csv: held: the dump ends within a row" err.txt || fail "cut.csv: not held: $(cat err.txt)"
head -c -3 good.csv >digit.csv # "...,0.3" became "...,0"
sed -n '$p' digit.csv | grep -q ',3$' && head -c -4 good.csv >digit.csv
accept digit.csv 'code="truncated" severity="hold"'
(head -c -30 good.csv; echo) >ended.csv # cut, and the line ended by whoever copied it
accept ended.csv 'code="truncated" severity="hold"' "the dump ends within a row at line 525, 127 samples into burst 4"
head -n 500 good.csv >short.csv
accept short.csv "the dump ends too early at line 500, 103 samples into burst 4; 3 bursts are complete"
head -c -1 good.csv >unended.csv
accept unended.csv '<end bursts="4"/>'

# marks instead of values: few are left out, many skip the burst
awk -F, -v OFS=, 'NR == 150 { $4 = "9.91E37" } 1' good.csv >mark.csv
sed 's/separator="comma"/separator="comma" unit_row="yes"/' "$pads/layout.xml" >marks.xml
cat >patient.xml <<'X'
<?xml version="1.0" encoding="UTF-8"?>
<procedure xmlns="urn:x-anelast:documents:1" version="1.0"><choice name="missing_skip" value="0.02"/></procedure>
X
accept mark.csv 'code="missing-values" severity="skip" burst="2"' "1 of 128 rows have a mark instead of a value"
"$ANELAST_BIN/anelast-intake" mark.csv -l marks.xml -s "$pads/specimen.xml" -p patient.xml -o out.xml 2>err.txt ||
    fail "mark.csv with a patient procedure: $(cat err.txt)"
grep -qF 'code="missing-values" severity="note" burst="2"' out.xml || fail "mark.csv: $(grep -o '<remark.*' out.xml)"
[ "$(grep -c 'quantity="time"' out.xml)" = 1 ] || fail "mark.csv: the burst with a gap has no times of its own"
[ "$(grep -c 'count="127"' out.xml)" = 4 ] || fail "mark.csv: the row with a mark was not left out of all signals"
rm -f out.xml
for mark in NaN --- ""; do
    awk -F, -v OFS=, -v mark="$mark" 'NR == 150 { $4 = mark } 1' good.csv >mark.csv
    accept mark.csv 'code="missing-values" severity="skip" burst="2"'
done

# channels that are swapped or inverted are found by the phase, never folded
pipe() {
    "$ANELAST_BIN/anelast-intake" "$1" -l "$2" -s "$pads/specimen.xml" -a "$pads/apparatus.xml" -o run.xml 2>err.txt ||
        fail "$1 with $2: $(cat err.txt)"
    "$ANELAST_BIN/anelast-phase" run.xml -o out.xml 2>err.txt
    [ $? = 1 ] || fail "$1 with $2: the phase was accepted"
    grep -qF -- "$3" err.txt || fail "$1 with $2: '$3' is not said: $(cat err.txt)"
    [ -z "$(find . -name '*out.xml*')" ] || fail "$1: left behind: $(find . -name '*out.xml*')"
    rm -f run.xml
}
sed 's/role="force" unit="N"/role="force" unit="N" inverted="yes"/' "$pads/layout.xml" >inverted.xml
pipe good.csv inverted.xml "one channel is inverted"
sed '13d; 12s/Position,Load/Load,Position/' good.csv >swapped.csv
sed 's/role="displacement" unit="um"/role="displacement" unit="m" gain="0.01"/; s/role="force" unit="N"/& gain="0.01"/' \
    "$pads/layout.xml" >bare.xml
pipe swapped.csv bare.xml "force and displacement are swapped"

# binary dumps
cp "$laminates/HL-0140.txt" .
layout=$laminates/layout.xml
specimen=$laminates/specimen.xml
cp "$laminates/HL-0140.bin" .
accept HL-0140.bin '<end bursts="70"/>'
head -c -1001 "$laminates/HL-0140.bin" >HL-0140.bin
refuse 1 HL-0140.bin "HL-0140.bin: " "one channel after the other"
cp "$laminates/HL-0140.bin" .
sed -i 's/type=int16/type=int32/' HL-0140.txt
refuse 1 HL-0140.bin "HL-0140.txt:2: type: the dump says 'int32', the layout 'int16'"
sed 's/position m/height m/' "$laminates/HL-0140.txt" >HL-0140.txt
refuse 1 HL-0140.bin "HL-0140.txt: channel 1 'height' is not mapped"
sed 's/position m/position N/' "$laminates/HL-0140.txt" >HL-0140.txt
refuse 1 HL-0140.bin "displacement: " "'N'"
sed 's/lot=/batch=/' "$laminates/HL-0140.txt" >HL-0140.txt
refuse 1 HL-0140.bin "HL-0140.txt:8: " "'batch'"
unset layout specimen

# places that cannot be written
if [ -w /dev/full ]; then
    "$ANELAST_BIN/anelast-intake" good.csv -l "$pads/layout.xml" -s "$pads/specimen.xml" >/dev/full 2>err.txt
    [ $? = 3 ] || fail "a full standard output: $(cat err.txt)"
fi
"$ANELAST_BIN/anelast-intake" good.csv -l "$pads/layout.xml" -s "$pads/specimen.xml" -o nowhere/out.xml 2>err.txt
[ $? = 3 ] || fail "a folder that is not there: $(cat err.txt)"
"$ANELAST_BIN/anelast-intake" good.csv 2>err.txt
[ $? = 2 ] || fail "no layout: exit code $?"
grep -qF -- "--layout is needed" err.txt || fail "no layout: $(cat err.txt)"

exit $failed
