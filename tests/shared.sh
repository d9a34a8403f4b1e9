#!/usr/bin/env bash
# tests/shared.sh DIR [DUMPS]: reduce every shared dump, each with the layout, specimen and apparatus documents written
# for it, into DIR/<dump name>/. Installs and builds first what is missing, as tests/run.sh does; with ANELAST_BIN set, the
# programs of that folder are used. DUMPS: the folder of dumps with their truth (default: the one beside the project).
#
# The documents are those of tests/shared/<dump name>/ with the constants that the truth gives (dimensions, compliance,
# mass, delay) put in, so that dumps of other constants are reduced with their own; for the shared dumps nothing changes.
# Documents land in DIR/<dump name>/<run id>/, and DIR/<dump name>/ links to each of them.
set -eu
[ $# -ge 1 ] || { echo "usage: tests/shared.sh DIR [DUMPS]" >&2; exit 2; }
top=$(cd "$(dirname "$0")/.." && pwd)
bin=${ANELAST_BIN:-}
if [ -z "$bin" ]; then
    . "$top/tests/prepare.sh"
    need_packages "${packages_to_build[@]}" python3
    build "$top" "$top/build" "$(testing_of "$top/build")"
    bin=$top/build/bin
fi
mkdir -p "$1"
into=$(cd "$1" && pwd)
dumps=${2:-$top/../shared/dumps}
[ -d "$dumps" ] || { echo "tests/shared.sh: $dumps: no such folder" >&2; exit 3; }
[ -x "$bin/anelast" ] || { echo "tests/shared.sh: $bin/anelast: no such program" >&2; exit 3; }

truth_of() {
    case $1 in
    hull_laminate*) echo hull_laminate ;;
    rail_pad-*) echo rail_pad-holds ;;
    *) echo "$1" ;;
    esac
}

failed=0
for dump in rail_pad.txt hull_laminate.tsv hull_laminate-counts.bin two_phase.csv rail_pad-holds.csv rail_pad-pulls.csv; do
    name=${dump%.*}
    [ -f "$dumps/$dump" ] || { echo "tests/shared.sh: $dumps/$dump is absent" >&2; failed=1; continue; }
    written=$top/tests/shared/$name
    put=$into/$name/written
    rm -rf "${into:?}/$name"
    mkdir -p "$put"
    truth=$dumps/$(truth_of "$name").truth.json
    for document in layout specimen apparatus procedure; do
        [ -f "$written/$document.xml" ] || continue
        python3 "$top/tests/fit_documents.py" "$written/$document.xml" "$truth" >"$put/$document.xml"
    done
    choices=(--layout "$put/layout.xml" --specimen "$put/specimen.xml" --apparatus "$put/apparatus.xml")
    [ -f "$put/procedure.xml" ] && choices+=(--procedure "$put/procedure.xml")
    echo "== $dump"
    "$bin/anelast" "$dumps/$dump" "${choices[@]}" --into "$into/$name" || failed=1
    for document in "$into/$name"/*/*.xml "$into/$name"/*/report.html; do
        case $document in
        "$put"/* | *'*'*) continue ;;
        esac
        ln -sf "$(basename "$(dirname "$document")")/$(basename "$document")" "$into/$name/$(basename "$document")"
    done
    [ -e "$into/$dump" ] || ln -s "$name" "$into/$dump"
done
exit $failed
