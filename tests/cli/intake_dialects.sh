#!/bin/bash
# One dump in many dialects: encodings and marks, separators, decimal marks, line ends, comments, quotes, repeated headers,
# footers, units in the layout or in the dump, no header at all. Each must give the same bursts, bit for bit, as the plain one.
. "$ANELAST_SOURCE/tests/command_line.bash"
pads=$ANELAST_SOURCE/fixtures/lower_quay/rail_pad
rm -rf work && mkdir work && cd work || exit 1

# Six bursts; the operator's name is beyond ASCII, so that a wrong decoding shows.
head -n 781 "$pads/RP-0522-1.csv" | sed '5s/late shift/Jörg Müller/' >plain.csv

take() {
    "$ANELAST_BIN/anelast-intake" "$1" -l "$2" -s "$pads/specimen.xml" -a "$pads/apparatus.xml" -o out.xml 2>err.txt
}

# What has to be the same: specimen and bursts.
content() {
    sed -n '/<specimen/,/<\/specimen>/p; /<burst/,/<\/burst>/p' "$1"
}

take plain.csv "$pads/layout.xml" || fail "plain.csv: $(cat err.txt)"
content out.xml >plain.txt
[ "$(grep -c '<burst' plain.txt)" = 6 ] || fail "plain.csv: not six bursts"
grep -q 'operator="Jörg Müller"' plain.txt || fail "plain.csv: the operator's name is lost"

# same NAME SED: the dump NAME, with the layout changed by SED, gives the same.
same() {
    sed "$2" "$pads/layout.xml" >layout.xml
    rm -f out.xml
    take "$1" layout.xml || fail "$1: $(cat err.txt)"
    content out.xml | cmp -s - plain.txt || fail "$1: other content: $(content out.xml | diff - plain.txt | cut -c1-200 | head -4)"
}

# encodings
printf '\357\273\277' | cat - plain.csv >mark.csv
same mark.csv ''
grep -q 'decoded as UTF-8' out.xml || fail "mark.csv: the mark is not remarked upon"
iconv -f UTF-8 -t ISO-8859-1 plain.csv >latin.csv
same latin.csv 's/encoding="UTF-8" sep/encoding="ISO-8859-1" sep/'
iconv -f UTF-8 -t WINDOWS-1252 plain.csv >windows.csv
same windows.csv 's/encoding="UTF-8" sep/encoding="Windows-1252" sep/'
for order in LE BE; do
    iconv -f UTF-8 -t UTF-16$order plain.csv >wide-$order.csv
    same wide-$order.csv "s/encoding=\"UTF-8\" sep/encoding=\"UTF-16$order\" sep/"
    { [ $order = LE ] && printf '\377\376' || printf '\376\377'; } | cat - wide-$order.csv >marked-$order.csv
    same marked-$order.csv 's/encoding="UTF-8" sep/encoding="UTF-16" sep/'
    grep -q "decoded as UTF-16$order" out.xml || fail "marked-$order.csv: the mark is not remarked upon"
done

# line ends, comments, blank lines, quotes, repeated headers, footers
sed 's/$/\r/' plain.csv >crlf.csv
same crlf.csv ''
sed '1i # by the export\n' plain.csv | sed '100i # a comment\n' >comments.csv
same comments.csv 's/decimal_mark="."/decimal_mark="." comment="#"/'
sed '2s/RP-0522-1/"RP-0522-1"/; 12s/Load/"Load"/; 13,400s/^\([^,]*\),/"\1",/' plain.csv >quotes.csv
same quotes.csv "s/decimal_mark=\".\"/decimal_mark=\".\" quote='\"'/"
awk 'NR == 12 { head = $0 } NR == 13 { units = $0 } NR > 13 && (NR - 14) % 128 == 0 && NR > 14 { print head; print units } 1' plain.csv >repeated.csv
same repeated.csv ''
printf 'End of test,6 steps\nreviewed,yes\n' | cat plain.csv - >footer.csv
same footer.csv 's/decimal_mark="."/decimal_mark="." footer="End of test"/'
sed '14,$s/$/,/' plain.csv >trailing.csv
same trailing.csv ''

# separators and decimal marks
tr ',' '\t' <plain.csv >tab.csv
same tab.csv 's/separator="comma"/separator="tab"/'
sed '1,13s/,/;/g; 14,$s/,/;/g; 14,$s/\./,/g; 8,10s/\./,/' plain.csv >comma.csv
same comma.csv 's/separator="comma" decimal_mark="."/separator="semicolon" decimal_mark=","/'
sed '1,11s/,/: /; 12,$s/,/|/g' plain.csv >bar.csv
same bar.csv 's/separator="comma"/separator="bar"/; s/<head>/<head key_separator=":">/'
sed '1,11s/,/: /; 13s/^,/- /; 12,$s/,/   /g' plain.csv >blanks.csv
same blanks.csv 's/separator="comma"/separator="blanks"/; s/<head>/<head key_separator=":">/'

# units: only in the layout, only in the dump; other columns and another order
sed '13d' plain.csv >unitless.csv
same unitless.csv ''
same plain.csv 's/\(<channel role="[a-z_]*"\) unit="[^"]*"/\1/'
awk -F, -v OFS=, 'NR < 12 { print; next } { print $5, "x" NR, $4, $3, $6, $2, $1 }' plain.csv | sed '12s/x12/Mark/; 13s/x13//' >order.csv
same order.csv 's/<\/channels>/<ignored><column>Mark<\/column><\/ignored><\/channels>/'

# columns by position, without a header row
sed '12,13d' plain.csv >headless.csv
position() {
    sed -e 's/decimal_mark="."/decimal_mark="." header="no"/' -e 's/<column>[^<]*<\/column>//' \
        -e 's/channel role="step"/& position="1"/; s/channel role="time"/& position="2"/' \
        -e 's/channel role="displacement"/& position="3"/; s/channel role="force"/& position="4"/' \
        -e 's/channel role="temperature"/& position="5"/; s/channel role="set_frequency"/& position="6"/' \
        "$pads/layout.xml" >layout.xml
}
position
take headless.csv layout.xml || fail "headless.csv: $(cat err.txt)"
content out.xml | cmp -s - plain.txt || fail "headless.csv: other content"

# bursts from the signals alone find what the step column says
awk -F, -v OFS=, 'NR < 12 { print; next } { print $2, $3, $4, $5 }' plain.csv >continuous.csv
sed -e 's/<bursts from="step"/<bursts from="signals"/' -e '/role="step"/d; /role="set_frequency"/d' "$pads/layout.xml" >layout.xml
take continuous.csv layout.xml || fail "continuous.csv: $(cat err.txt)"
content out.xml >found.txt
content out.xml | sed '/<set_frequency/d' | cmp -s - <(sed '/<set_frequency/d; s/ step="[0-9]*"//' plain.txt) ||
    fail "continuous.csv: other bursts: $(diff <(sed '/<set_frequency/d; s/ step="[0-9]*"//' plain.txt) found.txt | cut -c1-200 | head -4)"

# a small header before each burst; values with their units in the dump, or in the layout
awk -F, -v OFS=, 'NR < 12 { print; next } NR == 12 || NR == 13 { next }
    $1 != step { step = $1; print ""; print "<<" step ">>"; print "drive", $6 * 1000, "mHz"; print "rows", 128
                 print "Time,Position,Load,Oven"; print "s,um,N,degC" }
    { print $2, $3, $4, $5 }' plain.csv >blocks.csv
sed -e '/role="step"/d; /role="set_frequency"/d; /<self_test/,/<\/self_test>/d' \
    -e 's|<bursts from="step"/>|<bursts from="blocks" mark="\&lt;\&lt;{n}>>"><value role="set_frequency"><key>drive</key></value><value role="samples"><key>rows</key></value></bursts>|' \
    "$pads/layout.xml" >layout.xml
take blocks.csv layout.xml || fail "blocks.csv: $(cat err.txt)"
content out.xml | cmp -s - plain.txt || fail "blocks.csv: $(content out.xml | diff - plain.txt | cut -c1-200 | head -4)"
sed '1,11s/,/: /; s/^\(drive\|rows\),/\1: /; s/^\(drive: [0-9]*\),/\1 /' blocks.csv >colons.csv
sed 's/<head>/<head key_separator=":">/' layout.xml >colons.xml
take colons.csv colons.xml || fail "colons.csv: $(cat err.txt)"
content out.xml | cmp -s - plain.txt || fail "colons.csv: $(content out.xml | diff - plain.txt | cut -c1-200 | head -4)"
sed '400d' blocks.csv >fewer.csv
take fewer.csv layout.xml || fail "fewer.csv: $(cat err.txt)"
grep -q '128 samples declared, 127 found' out.xml || fail "fewer.csv: the lost sample is not remarked upon"
head -n 700 blocks.csv >ends.csv
take ends.csv layout.xml || fail "ends.csv: $(cat err.txt)"
grep -q 'code="truncated" severity="hold"' out.xml || fail "ends.csv: not held"

# binary dumps: every type, byte order and arrangement gives the counts back
laminates=$ANELAST_SOURCE/fixtures/lower_quay/hull_laminate
take_counts() {
    "$ANELAST_BIN/anelast-intake" "$1" -l "$2" -s "$laminates/specimen.xml" -a "$laminates/apparatus.xml" \
        --sidecar "$3" -o out.xml 2>err.txt || fail "$1: $(cat err.txt)"
}
take_counts "$laminates/HL-0140.bin" "$laminates/layout.xml" "$laminates/HL-0140.txt"
content out.xml >counts.txt
for form in int24:little:interleaved int32:big:interleaved int32:little:planar int16:little:interleaved \
    float32:little:planar float64:big:interleaved; do
    IFS=: read -r type order arrangement <<<"$form"
    python3 - "$laminates/HL-0140.bin" "$type" "$order" "$arrangement" >dump.bin <<'X'
import struct
import sys
counts = struct.iter_unpack(">h", open(sys.argv[1], "rb").read())
counts = [value for (value,) in counts]
n = len(counts) // 3
if sys.argv[4] == "interleaved":
    counts = [counts[k * n + i] for i in range(n) for k in range(3)]
mark = "<" if sys.argv[3] == "little" else ">"
code = {"int16": "h", "int32": "i", "float32": "f", "float64": "d"}.get(sys.argv[2])
sys.stdout.buffer.write(b"header of 17 byte")
for value in counts:
    sys.stdout.buffer.write(struct.pack(mark + code, value) if code else value.to_bytes(3, sys.argv[3], signed=True))
X
    sed "s/type=int16 order=big layout=planar/type=$type order=$order layout=$arrangement/" "$laminates/HL-0140.txt" >dump.txt
    sed "s/type=\"int16\" byte_order=\"big\" arrangement=\"planar\"/type=\"$type\" byte_order=\"$order\" arrangement=\"$arrangement\" offset=\"17\"/" \
        "$laminates/layout.xml" >layout.xml
    take_counts dump.bin layout.xml dump.txt
    content out.xml >got.txt
    if [ "${type#float}" = "$type" ]; then
        cmp -s got.txt counts.txt || fail "$form: other content"
    else
        python3 - got.txt counts.txt <<'X' || fail "$form: other values"
import base64
import re
import struct
import sys
def values(path):
    for coding, part in re.findall(r'coding="(\w+)".*?<part sha256="\w+">([^<]*)<', open(path, encoding="utf-8").read(), re.S):
        raw = base64.b64decode(part)
        yield [v for (v,) in struct.iter_unpack({"int16": "<h", "float64": "<d"}[coding], raw)]
got, expected = list(values(sys.argv[1])), list(values(sys.argv[2]))
sys.exit(0 if got == expected and len(got) == 210 else 1)
X
    fi
done

# what the instrument has corrected is not corrected again
sed 's/corrections compliance="no"/corrections compliance="yes"/' "$pads/layout.xml" >layout.xml
take plain.csv layout.xml || fail "corrected: $(cat err.txt)"
grep -q '<compliance' out.xml && fail "corrected: the compliance is still there"
grep -q 'code="corrected-before" severity="note"' out.xml || fail "corrected: no remark"

exit $failed
