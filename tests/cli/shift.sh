#!/usr/bin/env bash
# anelast-shift: a made solid's shift factors and law against its closed form, pipe and file, choices, a complex material, refusals.
. "$ANELAST_SOURCE/tests/command_line.bash"
export SOURCE_DATE_EPOCH=1772487600
grid_of() { # folder, options of made_dump.py...
    local folder=$1
    shift
    python3 "$ANELAST_SOURCE/tests/made_dump.py" "$folder" "$@" || fail "made_dump.py $*"
    "$bin/anelast-intake" "$folder/strip.csv" --layout "$folder/layout.xml" --specimen "$folder/specimen.xml" \
        --apparatus "$folder/apparatus.xml" | "$bin/anelast-phase" --quiet | "$bin/anelast-grid" >"$folder/grid.xml" || fail "grid of $folder"
}
choose() { # file, name, value [unit]
    echo "<procedure xmlns=\"urn:x-anelast:documents:1\" version=\"1.0\"><choice name=\"$2\" value=\"$3\"${4:+ unit=\"$4\"}/></procedure>" >"$1"
}
rm -rf simple complex none.xml
grid_of simple
grid_of complex --material complex --id RP-0612-2

expect_code 0 "a simple material" "$bin/anelast-shift" simple/grid.xml --output master.xml
xmllint --noout --schema "$ANELAST_SOURCE/include/anelast/schema/master.xsd" master.xml 2>err.txt || fail "schema: $(cat err.txt)"
grep -q '<superposition verdict="simple"' master.xml || fail "verdict: $(grep -o '<superposition [^>]*' master.xml)"
expect_code 0 "again" "$bin/anelast-shift" simple/grid.xml --output again.xml
cmp -s master.xml again.xml || fail "the same input made other bytes"
"$bin/anelast-shift" <simple/grid.xml >piped.xml 2>err.txt || fail "pipe: $(cat err.txt)"
diff <(grep -v '<input role="grid"' master.xml) <(grep -v '<input role="grid"' piped.xml) >/dev/null || fail "the pipe makes another master"

# The made solid follows WLF with 17.44 and 51.6 K at 250 K (Williams, Landel & Ferry 1955). Every shift within four standard
# uncertainties of its noise part, and 2 mK of the temperature's own noise, of that law's difference between isotherm and T0.
sed -n '/<shift /,/<\/shift>/p' master.xml |
    awk -F'"' '/<temperature /{t = $2} /<log10_aT /{for (i = 1; i < NF; i++) if ($i ~ /u_noise=$/) u = $(i + 1); print t, $2, u}' >shifts.txt
awk 'function law(t) { return -17.44 * (t - 250) / (51.6 + t - 250) }
    { t[NR] = $1; a[NR] = $2; u[NR] = $3; if ($3 == 0) t0 = $1 }
    END { for (i in t) { e = a[i] - (law(t[i]) - law(t0)); s = 0.34 * 0.002
            if (!(e * e <= 16 * (u[i] * u[i] + s * s))) { print "at " t[i] " K: " a[i] " off by " e " with u " u[i]; bad = 1 } }
        exit bad || NR != 12 || !t0 }' shifts.txt || fail "shifts are not those of the law"
grep -q '<trial kind="wlf" constants="2" chosen="true"' master.xml || fail "the law chosen: $(grep 'chosen="true"' master.xml)"

# Choices: an own reference temperature, which all of the document then keeps; vertical shifts left free.
choose at.xml reference_temperature 262 K
expect_code 0 "own reference" "$bin/anelast-shift" simple/grid.xml --procedure at.xml --output at.master.xml
grep -q '<reference_temperature value="262" unit="K"/>' at.master.xml || fail "reference temperature"
grep -q 'name="reference_temperature" value="262"' at.master.xml || fail "the choice in force is not recorded"
choose free.xml vertical free
expect_code 0 "free vertical shifts" "$bin/anelast-shift" simple/grid.xml --procedure free.xml --output free.master.xml
grep -q 'vertical="free"' free.master.xml || fail "free vertical shifts"

# Two mechanisms: called complex, with the numbers, and a hold in the document.
expect_code 0 "a complex material" "$bin/anelast-shift" complex/grid.xml --output complex.master.xml
grep -q 'complex: no single shift' err.txt || fail "message: $(cat err.txt)"
grep -q '<superposition verdict="complex"' complex.master.xml || fail "verdict on two mechanisms"
grep -q '<remark code="complex" severity="hold"' complex.master.xml || fail "remark on two mechanisms"

# Refusals: exit code, message, nothing left behind.
choose far.xml reference_temperature 500 K
expect_code 1 "reference out of range" "$bin/anelast-shift" simple/grid.xml --procedure far.xml --output none.xml
grep -q 'reference temperature 226.9 °C (500.00 K), where' err.txt || fail "message: $(cat err.txt)"
choose wrong.xml vertical sideways
expect_code 1 "no such word" "$bin/anelast-shift" simple/grid.xml --procedure wrong.xml --output none.xml
expect_code 3 "no such file" "$bin/anelast-shift" absent.xml --output none.xml
expect_code 1 "another document" "$bin/anelast-shift" master.xml --output none.xml
grep -q '^anelast-shift: master.xml:' err.txt || fail "message: $(cat err.txt)"
sed 's/outlier="[a-z]*"//; s/<cell burst="\([0-9]*\)"/<cell outlier="true" burst="\1"/' simple/grid.xml >out.grid.xml
expect_code 1 "no usable cell" "$bin/anelast-shift" out.grid.xml --output none.xml
grep -q 'superposition wants two or more' err.txt || fail "message: $(cat err.txt)"
head -c 20000 simple/grid.xml >cut.xml
expect_code 1 "cut short" "$bin/anelast-shift" cut.xml --output none.xml
expect_code 2 "wrong option" "$bin/anelast-shift" --nonsense simple/grid.xml
[ ! -e none.xml ] || fail "a refused master was left behind"
exit $failed
