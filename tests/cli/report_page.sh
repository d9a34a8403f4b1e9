#!/bin/bash
# The page of a run, from a fixture dump through the stage programs: opened in a headless browser without a word on its
# console, well-formed, nothing loaded from outside, the same bytes twice, and refusals with their exit codes.
. "$ANELAST_SOURCE/tests/command_line.bash"
export SOURCE_DATE_EPOCH=1795000000
lab=$ANELAST_SOURCE/fixtures/lower_quay/rail_pad

# refuse CODE WORDS COMMAND...: the exit code, WORDS on standard error, no page left behind.
refuse() {
    local code=$1 words=$2 got
    shift 2
    rm -f refused.html
    "$@" --output refused.html >out 2>err </dev/null
    got=$?
    [ "$got" = "$code" ] || fail "$*: exit code $got, expected $code: $(head -c 300 err)"
    grep -qF -- "$words" err || fail "$* does not say '$words': $(head -c 300 err)"
    [ -e refused.html ] && fail "$* leaves a page behind"
    return 0
}

# browse PAGE WIDTH: open a page in a headless browser; what it says on its console goes to the file console.
browse() {
    local home
    home=$(mktemp -d)
    timeout 120 chromium --headless --no-sandbox --disable-gpu --disable-quic --no-first-run --disable-component-update \
        --disable-background-networking --disable-sync --user-data-dir="$home" --enable-logging=stderr --v=0 \
        --window-size="$2,2000" --screenshot="$PWD/page-$2.png" "file://$PWD/$1" >browser 2>&1 ||
        fail "the browser ends with $? on $1: $(tail -3 browser)"
    grep -i 'CONSOLE' browser >console
    [ -s "page-$2.png" ] || fail "no picture of $1 at width $2"
    rm -rf "$home"
}

rm -f ./*.xml ./*.html ./*.png
"$ANELAST_BIN/anelast-intake" "$lab/RP-0522-1.csv" --layout "$lab/layout.xml" --specimen "$lab/specimen.xml" \
    --apparatus "$lab/apparatus.xml" --output run.xml &&
    "$ANELAST_BIN/anelast-phase" run.xml --quiet --output points.xml &&
    "$ANELAST_BIN/anelast-grid" points.xml --output grid.xml &&
    "$ANELAST_BIN/anelast-shift" grid.xml --output master.xml &&
    "$ANELAST_BIN/anelast-prony" master.xml --output material.xml || { fail "the line does not come to its end"; exit 1; }

documents=(run.xml points.xml grid.xml master.xml material.xml)
"$ANELAST_BIN/anelast-report" "${documents[@]}" --output page.html || fail "no page"
"$ANELAST_BIN/anelast-report" material.xml grid.xml run.xml master.xml points.xml >again.html || fail "no page in another order"
cmp page.html again.html || fail "two pages of the same documents differ"
"$ANELAST_BIN/anelast-report" <points.xml >piped.html || fail "no page from standard input"
grep -q 'standard input' piped.html || fail "the page does not say that it came from standard input"
"$ANELAST_BIN/anelast-report" run.xml points.xml --burst 2 --output burst.html || fail "no page of burst 2"
grep -q '<p>Burst 2: ' burst.html || fail "burst 2 is not shown"

xmllint --nonet --noout page.html || fail "the page is not well-formed"
for hash in $(sha256sum "${documents[@]}" "$lab/RP-0522-1.csv" | cut -d' ' -f1); do
    grep -q "$hash" page.html || fail "an input's SHA-256 is not on the page: $hash"
done
grep -oE '(https?:)?//[a-z0-9.-]+\.[a-z]+[^"]*' page.html | grep -vxE 'http://www.w3.org/(2000/svg|1999/xhtml)' &&
    fail "the page names an address"

# compare DOCUMENT CAPTION PAIR...: numbers on the page against the document's own table.
compare() {
    local document=$1 caption=$2
    shift 2
    "$ANELAST_BIN/anelast-table" "$document" >table.csv || fail "no table of $document"
    python3 "$ANELAST_SOURCE/tests/cli/page_numbers.py" page.html table.csv "$caption" "$@" || fail "numbers of $document"
}

compare points.xml Points '0=burst*1+0' '2=temperature_K*1+-273.15' '3=frequency_Hz*1+0' '4=storage_Pa*1e-6+0' \
    '5=u_noise_storage_Pa*1e-6+0' '6=u_common_storage_Pa*1e-6+0' '7=loss_Pa*1e-6+0' '8=u_noise_loss_Pa*1e-6+0' \
    '9=u_common_loss_Pa*1e-6+0' '10=loss_factor*1+0'
compare master.xml 'Shift factors' '0=temperature_K*1+-273.15' '1=log10_aT*1+0' '4=log10_bT*1+0'
compare material.xml 'Prony series' '0=relaxation_time_s*1+0' '1=modulus_Pa*1e-6+0' '3=relative_weight*1+0'

for width in 1200 500; do
    browse page.html $width
    [ -s console ] && fail "the page writes on the browser's console: $(head -3 console)"
done
sed 's|</body>|<script>no_such_function()</script></body>|' page.html >broken.html
browse broken.html 1200
grep -q 'no_such_function' console || fail "an error on the browser's console would go unnoticed"

refuse 2 "second points document" "$ANELAST_BIN/anelast-report" points.xml points.xml
refuse 2 "is none of the documents" "$ANELAST_BIN/anelast-report" "$lab/specimen.xml"
refuse 2 "--burst '0'" "$ANELAST_BIN/anelast-report" run.xml --burst 0
refuse 2 "burst 9999 is not in the run document" "$ANELAST_BIN/anelast-report" run.xml --burst 9999
refuse 2 "where a run document is given" "$ANELAST_BIN/anelast-report" points.xml --burst 1
refuse 2 "'nonsense'" "$ANELAST_BIN/anelast-report" points.xml --missing nonsense
refuse 3 "absent.xml" "$ANELAST_BIN/anelast-report" absent.xml
head -c 5000 points.xml >cut.xml
refuse 1 "cut.xml" "$ANELAST_BIN/anelast-report" cut.xml
exit $failed
