#!/usr/bin/env bash
# anelast: the folder after a run, what the terminal says, replacing and refusing, stages that refuse, nothing left behind.
. "$ANELAST_SOURCE/tests/command_line.bash"
says() { grep -q -- "$2" out.txt || { fail "$1: the terminal does not say '$2'"; cat out.txt; }; }
complains() { grep -q -- "$2" err.txt || { fail "$1: no word of '$2'"; cat err.txt; }; }
short() { [ "$(wc -l <out.txt)" -lt 15 ] || fail "$1: $(wc -l <out.txt) lines on the terminal"; }
holds() { # what, folder, documents...
    local what=$1 folder=$2
    shift 2
    [ "$(ls -A "$folder" 2>/dev/null | sort | tr '\n' ' ')" = "$(printf '%s\n' "$@" | sort | tr '\n' ' ')" ] ||
        fail "$what: $folder holds $(ls -A "$folder" 2>/dev/null | tr '\n' ' ')"
}
empty() { [ -z "$(ls -A "$2" 2>/dev/null)" ] || fail "$1: $2 holds $(ls -A "$2" | tr '\n' ' ')"; }
clean() { # what, folder: no work folder is left
    [ -z "$(find "$2" -maxdepth 1 -name '.anelast-*' 2>/dev/null)" ] || fail "$1: a work folder was left behind"
}
made() { python3 "$ANELAST_SOURCE/tests/made_dump.py" "$@" || fail "made_dump.py $*"; }
export SOURCE_DATE_EPOCH=1772487600
rm -rf simple complex clip few hold other results stages
made simple
made complex --material complex --id RP-0613-1
made clip --clip --id RP-0614-1
made few --few --id RP-0615-1
made hold --hold --id RP-0616-1
made other --seed 9
all="run.xml points.xml grid.xml master.xml material.xml report.html"

# A run that superposes: everything is there, and the documents beside the dump were chosen and named.
expect_code 0 "simple" "$bin/anelast" simple/strip.csv --into results/night
run=results/night/RP-0612-1_strip
holds "simple" "$run" $all
says "simple" "RP-0612-1_strip: usable (specimen RP-0612-1, rail pad compound 22, lot 0612)"
says "simple" "bursts      .* 0 skipped; 12 isotherms from -[0-9.]* to [0-9.]* °C"
says "simple" "correction  frame compliance: "
says "simple" "loss peak -13\.[0-9] °C"
says "simple" "superposes  simple (reduced chi-square .*"
says "simple" "isotherms together$"
says "simple" "beside the dump: layout.xml, specimen.xml, apparatus.xml"
says "simple" "page        results/night/RP-0612-1_strip/report.html"
short "simple"
clean "simple" results/night
for document in run points grid master material; do
    xmllint --noout --schema "$ANELAST_SOURCE/include/anelast/schema/$document.xsd" "$run/$document.xml" 2>err.txt ||
        fail "$document.xml: $(tail -n 2 err.txt)"
done

# The same again replaces the folder with the same bytes; what people put there stays.
(cd "$run" && sha256sum $all) >sums.txt
echo "clamped twice" >"$run/note.txt"
expect_code 0 "again" "$bin/anelast" simple/strip.csv --into results/night
says "again" "the same reduction replaced"
(cd "$run" && sha256sum --quiet -c) <sums.txt || fail "the same input made other bytes"
holds "again" "$run" $all note.txt
clean "again" results/night
# Other documents for the same dump replace it too, and it is said.
sed 's/u="0.005"/u="0.007"/' simple/specimen.xml >thicker.xml
expect_code 0 "other specimen" "$bin/anelast" simple/strip.csv --specimen thicker.xml --into results/night
says "other specimen" "another reduction of the same dump replaced"
grep -q 'u="7e-06"' "$run/run.xml" || fail "the specimen given was not used"
# Another dump under the same id is refused, and the first stays as it was.
(cd "$run" && sha256sum $all) >sums.txt
expect_code 1 "identity" "$bin/anelast" other/strip.csv --into results/night
complains "identity" "run id 'RP-0612-1_strip' stands for another dump already"
(cd "$run" && sha256sum --quiet -c) <sums.txt || fail "a refused run touched the old one"
clean "identity" results/night

# Two dumps of one run id at the same time: one stands, the other is refused.
"$bin/anelast" simple/strip.csv --into results/race >/dev/null 2>one.txt &
first=$!
"$bin/anelast" other/strip.csv --into results/race >/dev/null 2>two.txt
second=$?
wait $first
[ "$(($? + second))" -eq 1 ] || fail "two at once: $(cat one.txt two.txt)"
grep -q "stands for another dump already" one.txt two.txt || fail "two at once: $(cat one.txt two.txt)"
holds "two at once" results/race/RP-0612-1_strip $all
clean "two at once" results/race

# What a killed program left there goes, but not what is fresh, and not what people have put there.
mkdir -p results/night/.anelast-old001 results/night/.anelast-old002 results/night/.anelast-new001
touch results/night/.anelast-old001/run.xml results/night/.anelast-old002/note.txt
touch -d '1 hour ago' results/night/.anelast-old001 results/night/.anelast-old002
expect_code 0 "abandoned" "$bin/anelast" few/strip.csv --into results/night
[ ! -e results/night/.anelast-old001 ] || fail "an abandoned work folder was not removed"
[ -e results/night/.anelast-old002/note.txt ] || fail "somebody's file was removed"
[ -e results/night/.anelast-new001 ] || fail "a fresh work folder was removed"
rm -r results/night/.anelast-*

# Two processes with their own laws: no spectrum is handed over without the override, and it is said why.
expect_code 0 "complex" "$bin/anelast" complex/strip.csv --into results
holds "complex" results/RP-0613-1_strip run.xml points.xml grid.xml master.xml report.html
says "complex" "superposes  complex (reduced chi-square "
says "complex" "material    none: "
short "complex"
expect_code 0 "override" "$bin/anelast" complex/strip.csv --override "K. Adeyemi: at 20 degC only" --into results
holds "override" results/RP-0613-1_strip $all
grep -q 'K. Adeyemi: at 20 degC only' results/RP-0613-1_strip/material.xml || fail "the override's reason is not in the material"

# A clipped burst: partial, with what to measure again; one isotherm: the moduli stand, there is no master.
expect_code 0 "clipped" "$bin/anelast" clip/strip.csv --into results
says "clipped" "RP-0614-1_strip: partial"
says "clipped" "1 skipped"
says "clipped" "redo now    measure again: -25\.[0-9] °C: 20 Hz"
short "clipped"
expect_code 0 "few" "$bin/anelast" few/strip.csv --into results
holds "few" results/RP-0615-1_strip run.xml points.xml grid.xml report.html
says "few" "no master curve: "
# Holds are taken in, and it is said that no more is made of them.
expect_code 0 "holds" "$bin/anelast" hold/strip.csv --into results
holds "holds" results/RP-0616-1_strip run.xml report.html
says "holds" "12 holds or pulls, no oscillation"
short "holds"

# One bad dump does not stop the others, and is the exit code.
sed '20s/,[^,]*,/,1.2.3,/' few/strip.csv >few/bad.csv
rm -rf results/RP-0615-1_strip
expect_code 1 "one bad" "$bin/anelast" few/bad.csv few/strip.csv --into results
complains "one bad" "^anelast-intake: few/bad.csv:20:"
holds "one bad" results/RP-0615-1_strip run.xml points.xml grid.xml report.html
[ ! -e results/RP-0615-1_bad ] || fail "a refused dump left a folder"
clean "one bad" results

# Names that look like options, and names longer than a line: the verdict is still said.
(cd few && cp strip.csv ./-d.csv && "$bin/anelast" --into ../results/dash -- -d.csv >../out.txt 2>../err.txt) || fail "-d.csv: $(cat err.txt)"
holds "a dash" results/dash/RP-0615-1_-d run.xml points.xml grid.xml report.html
long=$(printf 'x%.0s' {1..90})
cp few/strip.csv "few/$long.csv"
expect_code 0 "a long name" "$bin/anelast" "few/$long.csv" --into results/long
says "a long name" "^RP-0615-1_xxx.*x\.\.\.: [a-z]* "

# Usage and input.
expect_code 2 "no folder named" "$bin/anelast" simple/strip.csv --into ""
complains "no folder named" "^anelast: --into names no folder"
expect_code 2 "no dump" "$bin/anelast"
expect_code 3 "absent" "$bin/anelast" absent.csv --into results
complains "absent" "^anelast: absent.csv: "
cp simple/strip.csv lone.csv
expect_code 2 "no layout" "$bin/anelast" lone.csv --into results
complains "no layout" "no layout document stands beside the dump"
mkdir -p two && cp simple/strip.csv two/ && cp simple/layout.xml two/a.xml && cp simple/layout.xml two/b.xml
expect_code 2 "two layouts" "$bin/anelast" two/strip.csv --into results
complains "two layouts" "2 layout documents stand beside the dump (a.xml, b.xml)"
rm two/b.xml && cp simple/specimen.xml two/strip-specimen.xml
expect_code 0 "the only one" "$bin/anelast" two/strip.csv --into results/two
says "the only one" "beside the dump: a.xml, strip-specimen.xml"
: >file
expect_code 3 "no folder" "$bin/anelast" simple/strip.csv --into file
sed -i 's/"isotherm_width"/"isotherm_with"/' "$(printf '<procedure xmlns="urn:x-anelast:documents:1" version="1.0"><choice name="isotherm_width" value="0.5" unit="K"/></procedure>' >lab.xml; echo lab.xml)"
expect_code 1 "mistyped choice" "$bin/anelast" simple/strip.csv --procedure lab.xml --into results/none
[ ! -e results/none/RP-0612-1_strip ] || fail "a run with a mistyped procedure left a folder"

# Stages that fail in other ways: stand-ins beside a copy of the program.
mkdir stages
for program in "$bin"/anelast*; do ln -s "$program" stages/; done
rm stages/anelast && cp "$bin/anelast" stages/
stand_in() { # program, what it does
    rm -f "stages/$1"
    printf '#!/bin/sh\n%s\n' "$2" >"stages/$1"
    chmod +x "stages/$1"
}
rm -rf results/stages
stand_in anelast-grid 'echo "anelast-grid: points.xml: no burst with a modulus is left to grid" >&2; exit 1'
expect_code 1 "grid refuses" stages/anelast simple/strip.csv --into results/stages
holds "grid refuses" results/stages/RP-0612-1_strip run.xml points.xml report.html
says "grid refuses" "RP-0612-1_strip: repeat"
says "grid refuses" "why         points.xml: no burst with a modulus is left to grid"
rm -rf results/stages
stand_in anelast-grid 'kill -KILL $$'
expect_code 3 "grid is killed" stages/anelast simple/strip.csv --into results/stages
complains "grid is killed" "ended by signal 9"
empty "grid is killed" results/stages
stand_in anelast-grid 'echo "anelast-grid: grid.xml: cannot be written: No space left on device" >&2; exit 3'
expect_code 3 "disk full" stages/anelast simple/strip.csv --into results/stages
empty "disk full" results/stages
rm stages/anelast-grid && ln -s "$bin/anelast-grid" stages/
stand_in anelast-report 'echo "anelast-report: master.xml:3: something is wrong" >&2; exit 1'
expect_code 1 "no page" stages/anelast few/strip.csv --into results/stages
holds "no page" results/stages/RP-0615-1_strip run.xml points.xml grid.xml
complains "no page" "^anelast-report: master.xml:3: something is wrong"
# Ended from outside while a stage runs: the stage ends too, and no work folder is left. (A script's background jobs
# ignore SIGINT; SIGTERM takes the same way.)
rm stages/anelast-grid
stand_in anelast-grid 'echo $$ >stage.pid; exec sleep 60'
rm -f stage.pid
stages/anelast simple/strip.csv --into results/ended >out.txt 2>err.txt &
job=$!
for _ in $(seq 100); do [ -s stage.pid ] && break; sleep 0.1; done
kill -TERM $job
wait $job
[ $? -eq 143 ] || fail "ended: exit $?"
empty "ended" results/ended
complains "ended" "ended by signal 15; nothing of this dump is left behind"
kill -0 "$(cat stage.pid)" 2>/dev/null && fail "ended: the stage still runs"
rm stages/anelast-grid && ln -s "$bin/anelast-grid" stages/
rm stages/anelast-phase
expect_code 3 "a stage is absent" stages/anelast few/strip.csv --into results/absent
complains "a stage is absent" "anelast-phase: cannot be started"
empty "a stage is absent" results/absent
exit $failed
