#!/usr/bin/env bash
# anelast-table: the fixed heads, escaping, units, other tables, refusals with their exit codes.
. "$ANELAST_SOURCE/tests/command_line.bash"
same() { # what, expected: against out.txt
    [ "$(cat out.txt)" = "$2" ] || { fail "$1:"; diff <(echo "$2") out.txt; }
}

# The examples of the schemas are whole documents: their main tables carry the agreed heads.
example() { # root: the example document out of its schema
    python3 - "$ANELAST_SOURCE/include/anelast/schema/$1.xsd" >"$1.xml" <<'PY'
import sys
from xml.etree import ElementTree
for node in ElementTree.parse(sys.argv[1]).iter("{http://www.w3.org/2001/XMLSchema}appinfo"):
    if node.text and node.text.lstrip().startswith("<?xml"):
        sys.stdout.write(node.text.lstrip())
        break
PY
}
heads() { # root, head
    example "$1"
    expect_code 0 "table of $1" "$bin/anelast-table" "$1.xml"
    [ "$(head -n 1 out.txt)" = "$2" ] || fail "head of $1: $(head -n 1 out.txt)"
    [ "$(wc -l <out.txt)" -ge 2 ] || fail "$1: no rows"
}
moduli=temperature_K,frequency_Hz,storage_Pa,loss_Pa,loss_factor,u_noise_storage_Pa,u_noise_loss_Pa,u_common_storage_Pa,u_common_loss_Pa,remarks
heads points "burst,$moduli"
heads grid "isotherm,burst,$moduli"
heads master temperature_K,log10_aT,u_log10_aT,log10_bT,u_log10_bT
heads material relaxation_time_s,modulus_Pa,relative_weight,trusted
heads procedure name,value,unit
example grid
expect_code 0 "grid" "$bin/anelast-table" grid.xml
same "grid rows" "isotherm,burst,$moduli
1,1,243.032,0.2,1.53e9,1.471e8,0.09615,1.1e6,1.1e6,2.9e7,2.8e6,"

# Every table that --list names can be printed, and has a head.
for document in points grid master material procedure; do
    expect_code 0 "list of $document" "$bin/anelast-table" --list "$document.xml"
    cp out.txt list.txt
    [ -s list.txt ] || fail "$document: no tables"
    while read -r name _; do
        expect_code 0 "$document: table $name" "$bin/anelast-table" --table "$name" "$document.xml"
        [ -s out.txt ] || fail "$document: table $name is empty"
    done <list.txt
done

# Escaping after RFC 4180; a text that a spreadsheet would run as a formula is made plain text; numbers stay numbers.
cat >hostile.xml <<'XML'
<?xml version="1.0" encoding="UTF-8"?>
<grid xmlns="urn:x-anelast:documents:1" version="1.0" id="LQ-RP-0412">
  <made by="anelast-grid" version="0.1.0" at="2026-03-02T21:40:00Z">
    <choice name="isotherm_width" value="=2+5" unit="K"/>
    <choice name="repeat_flag" value="-0.5" unit="1"/>
  </made>
  <specimen id="RP-0412-1"/>
  <apparatus id="bench 2"/>
  <remark code="low-snr" severity="flag" action="@SUM(A1)">says "no", then stops</remark>
  <assessment verdict="usable" used="1" flagged="0" skipped="0"/>
  <isotherm n="1" direction="heating" steady="true">
    <temperature value="-30" unit="Cel"/>
    <cell burst="1" repeats="1">
      <temperature value="243.032" unit="K"/>
      <frequency value="0.2" unit="kHz"/>
      <storage value="1.5" unit="GPa" u_noise="0.001" u_common="0.03"/>
      <loss value="1e8" unit="Pa" u_noise="1e6" u_common="2e6"/>
      <loss_factor value="0.0667" unit="1" u_noise="7e-4" u_common="2e-4"/>
      <noise storage_storage="1e12" storage_loss="0" loss_loss="1e12" unit="Pa2"/>
      <remark code="low-snr" severity="flag" burst="1">a</remark>
      <remark code="drift-check" severity="flag" burst="1">b</remark>
    </cell>
  </isotherm>
</grid>
XML
expect_code 0 "choices" "$bin/anelast-table" --table choices hostile.xml
same "formulas" "name,value,unit
isotherm_width,\"'=2+5\",K
repeat_flag,-0.5,1"
expect_code 0 "remarks" "$bin/anelast-table" --table remarks hostile.xml
[ "$(sed -n 2p out.txt)" = 'low-snr,flag,,"says ""no"", then stops","'"'"'@SUM(A1)"' ] || fail "quotes: $(sed -n 2p out.txt)"
[ "$(wc -l <out.txt)" -eq 4 ] || fail "remarks of all levels: $(wc -l <out.txt) lines"
expect_code 0 "units" "$bin/anelast-table" hostile.xml
same "units are those of the head" "isotherm,burst,$moduli
1,1,243.032,200,1500000000,1e8,0.0667,1000000,1e6,30000000,2e6,low-snr drift-check"
expect_code 0 "isotherms" "$bin/anelast-table" --table isotherms hostile.xml
awk -F, 'NR == 2 { bad = !(($4 - 243.15)^2 < 1e-20) } END { exit bad }' out.txt || fail "-30 degrees Celsius: $(sed -n 2p out.txt)"

# Standard input, output to a file, and what is refused.
expect_code 0 "standard input" "$bin/anelast-table" --output cells.csv <grid.xml
[ -s cells.csv ] || fail "no cells.csv"
expect_code 2 "no such table" "$bin/anelast-table" --table nonsense grid.xml
grep -q "no table 'nonsense'" err.txt || fail "message: $(cat err.txt)"
expect_code 2 "two documents" "$bin/anelast-table" grid.xml points.xml
expect_code 3 "no such file" "$bin/anelast-table" absent.xml
sed 's/verdict="usable"/verdict="fine"/' hostile.xml >invalid.xml
rm -f none.csv
expect_code 1 "invalid document" "$bin/anelast-table" --output none.csv invalid.xml
grep -q "^anelast-table: invalid.xml:[0-9]*:" err.txt || fail "place of the fault: $(cat err.txt)"
[ ! -e none.csv ] || fail "an output of an invalid document was left behind"
expect_code 1 "truncated document" sh -c "head -c 900 hostile.xml | '$bin/anelast-table'"
[ ! -s out.txt ] || fail "rows of a truncated document were printed"
expect_code 3 "full disk" sh -c "'$bin/anelast-table' grid.xml >/dev/full"
exit $failed
