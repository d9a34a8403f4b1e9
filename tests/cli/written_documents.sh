#!/bin/bash
# The written documents: those of the demo lab and of the shared dumps are valid; the demo lab's dumps are what their script makes;
# putting the truth's constants into the documents of the shared dumps changes no byte, and another bench's constants arrive.
. "$ANELAST_SOURCE/tests/command_line.bash"
schemas=$ANELAST_SOURCE/include/anelast/schema

for document in "$ANELAST_SOURCE"/fixtures/lower_quay/*/*.xml "$ANELAST_SOURCE"/tests/shared/*/*.xml; do
    kind=$(sed -n 's/^<\([a-z]*\) .*/\1/p' "$document" | head -1)
    xmllint --noout --nonet --schema "$schemas/$kind.xsd" "$document" 2>err.txt || fail "$document: $(cat err.txt)"
done

rm -rf made && mkdir made
python3 "$ANELAST_SOURCE/fixtures/make_dumps.py" made || fail "make_dumps.py"
for dump in $(cd made && find . -type f); do
    cmp "made/$dump" "$ANELAST_SOURCE/fixtures/lower_quay/$dump" || fail "$dump is not what make_dumps.py makes"
done

cat >truth.json <<'X'
{"meta": {"specimen": "LQ-9", "material": "other", "lot": "9", "date": "2026-06-01T01:02:03Z",
          "length": 0.0335, "width": 0.00625, "thickness": 0.00147},
 "bench": {"compliance": 2.75e-07, "mass": 0.0115, "skew": -2.5e-06}}
X
put() { python3 "$ANELAST_SOURCE/tests/fit_documents.py" "$ANELAST_SOURCE/tests/shared/$1.xml" "${2:-truth.json}"; }
put two_phase/specimen >out.xml
for text in 'id="LQ-9"' 'lot="9"' 'started="2026-06-01T01:02:03Z"' '<length value="33.5" unit="mm" u="0.05"/>' \
    '<width value="6.25" unit="mm"' '<thickness value="1.47" unit="mm"'; do
    grep -qF -- "$text" out.xml || fail "specimen: $text is not there"
done
put rail_pad/apparatus >out.xml
for text in '<delay value="-2.5" unit="us" u="0"/>' '<moving_mass value="11.5" unit="g" u="0"/>' \
    '<compliance value="2.75e-7" unit="m/N" u="0"/>'; do
    grep -qF -- "$text" out.xml || fail "apparatus: $text is not there: $(cat out.xml)"
done
[ $failed = 0 ] || exit 1

dumps=$ANELAST_SOURCE/../shared/dumps
[ -d "$dumps" ] || { echo "skipped: the shared dumps do not stand beside the project"; exit 77; }
for folder in "$ANELAST_SOURCE"/tests/shared/*/; do
    name=$(basename "$folder")
    case $name in
    hull_laminate*) truth=hull_laminate ;;
    rail_pad-*) truth=rail_pad-holds ;;
    *) truth=$name ;;
    esac
    for document in "$folder"*.xml; do
        put "$name/$(basename "$document" .xml)" "$dumps/$truth.truth.json" | cmp - "$document" || fail "$document changes"
    done
done
exit $failed
