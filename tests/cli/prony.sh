#!/usr/bin/env bash
# anelast-prony: a made material against its closed form, a complex one refused unless overridden in writing, bad input.
. "$ANELAST_SOURCE/tests/command_line.bash"
schema=$ANELAST_SOURCE/include/anelast/schema/material.xsd
export SOURCE_DATE_EPOCH=1772487600
expect_words() { # what, words in err.txt...
    local what=$1
    shift
    for words in "$@"; do
        grep -qF -- "$words" err.txt || { fail "$what: '$words' is not in the message"; cat err.txt; }
    done
}
master() { # folder: a master document of the made dump in it, by one pipe
    "$bin/anelast-intake" "$1/strip.csv" --layout "$1/layout.xml" --specimen "$1/specimen.xml" --apparatus "$1/apparatus.xml" |
        "$bin/anelast-phase" 2>/dev/null | "$bin/anelast-grid" | "$bin/anelast-shift" >"$1/master.xml" 2>/dev/null
}

rm -rf simple complex
python3 "$ANELAST_SOURCE/tests/made_dump.py" simple
python3 "$ANELAST_SOURCE/tests/made_dump.py" complex --material complex --id RP-0612-2
master simple
master complex

# ---- a simple material: valid, the same bytes twice, through a pipe too, and true ----
expect_code 0 "simple" "$bin/anelast-prony" simple/master.xml --output simple/material.xml
xmllint --noout --schema "$schema" simple/material.xml 2>err.txt || { fail "not valid"; cat err.txt; }
expect_code 0 "again" "$bin/anelast-prony" simple/master.xml
cmp -s out.txt simple/material.xml || fail "other bytes on standard output than in the file"
"$bin/anelast-prony" <simple/master.xml | grep -q 'path="-"' || fail "standard input is not read"

# The modes against the fractional Zener solid of the dump, over the trusted window: within 1 % of |E*|, the default error of
# the modes, and 0.5 % for what the dump's noise and rounding leave.
"$bin/anelast-table" simple/material.xml >modes.csv
"$bin/anelast-table" --table limits simple/material.xml >limits.csv
python3 - "$ANELAST_SOURCE/tests" <<'PY' || fail "the modes are not those of the made material"
import csv, math, sys
sys.path.insert(0, sys.argv[1])
from made_dump import modulus
modes = [{k: v for k, v in row.items()} for row in csv.DictReader(open("modes.csv"))]
limits = next(csv.DictReader(open("limits.csv")))
kelvin = float(limits["reference_temperature_K"])
low, high = float(limits["time_from_s"]), float(limits["time_to_s"])
weights = sum(float(m["relative_weight"]) for m in modes)
worst, n = 0.0, 0
omega = 1 / high
while omega < 1 / low:
    fitted = complex(float(limits["long_term_modulus_Pa"]))
    for m in modes:
        x = 1j * omega * float(m["relaxation_time_s"])
        fitted += float(m["modulus_Pa"]) * x / (1 + x)
    true = modulus(kelvin, omega / (2 * math.pi), "simple")
    worst = max(worst, abs(fitted - true) / abs(true))
    omega *= 1.5
    n += 1
print(f"{len(modes)} modes, {n} frequencies, worst {100 * worst:.2f} %, weights {weights:.6f}")
sys.exit(not (n > 10 and worst < 0.015 and 0.5 < weights <= 1))
PY

# ---- a complex material: refused with the number that says so, no file; overridden in writing two ways ----
expect_code 1 "complex" "$bin/anelast-prony" complex/master.xml --output complex/material.xml
expect_words "complex" "superposition does not apply" "reduced chi-square" "--override"
[ -e complex/material.xml ] && fail "a spectrum of a complex material was handed over"
ls complex/*.tmp* complex/.[!.]* >/dev/null 2>&1 && fail "something was left behind"
expect_code 1 "override without a reason" "$bin/anelast-prony" complex/master.xml --override ""
expect_code 0 "override" "$bin/anelast-prony" complex/master.xml --override "K. Adeyemi: at one temperature only"
grep -q 'verdict="complex" override="K. Adeyemi: at one temperature only"' out.txt || fail "the override is not in the document"
grep -q '<remark code="overridden" severity="hold"' out.txt || fail "the override is not remarked upon"
grep -q '<caution>Superposition does NOT apply' out.txt || fail "no caution about the override"
xmllint --noout --schema "$schema" out.txt 2>err.txt || { fail "overridden: not valid"; cat err.txt; }
cat >yes.xml <<'XML'
<?xml version="1.0" encoding="UTF-8"?>
<procedure xmlns="urn:x-anelast:documents:1" version="1.0"><choice name="override_complex" value="yes"/></procedure>
XML
expect_code 0 "override by procedure" "$bin/anelast-prony" complex/master.xml --procedure yes.xml
grep -q 'override="override_complex in procedure yes.xml"' out.txt || fail "the procedure's override is not in the document"

# ---- the long end as the procedure says ----
cat >liquid.xml <<'XML'
<?xml version="1.0" encoding="UTF-8"?>
<procedure xmlns="urn:x-anelast:documents:1" version="1.0"><choice name="long_term" value="liquid"/></procedure>
XML
expect_code 0 "liquid" "$bin/anelast-prony" simple/master.xml --procedure liquid.xml --output simple/liquid.xml
grep -q 'end_state="liquid"' simple/liquid.xml || fail "the procedure's liquid is not one"
grep -q '<long_term_modulus value="0" unit="Pa"/>' simple/liquid.xml || fail "a liquid with a long-term modulus"

# ---- what cannot be ----
expect_code 3 "no file" "$bin/anelast-prony" absent.xml --output made.xml
expect_words "no file" "absent.xml"
expect_code 1 "another document" "$bin/anelast-prony" yes.xml --output made.xml
expect_words "another document" "procedure"
head -c 4000 simple/master.xml >cut.xml
expect_code 1 "cut short" "$bin/anelast-prony" cut.xml --output made.xml
expect_words "cut short" "cut.xml:"
sed 's/<modulus value="/<modulus value="-/' simple/master.xml >negative.xml
expect_code 1 "negative" "$bin/anelast-prony" negative.xml --output made.xml
expect_words "negative" "negative.xml:"
expect_code 2 "no such option" "$bin/anelast-prony" --overide x simple/master.xml
expect_code 2 "two masters" "$bin/anelast-prony" simple/master.xml simple/master.xml
[ -e made.xml ] && fail "a refused document left a file behind"
exit $failed
