#!/bin/bash
# The shape that all programs share: help and version on standard output, wrong usage on standard error with exit code 2, a
# standard output that cannot be written found with exit code 3, and nothing left behind by a refusal.
. "$ANELAST_SOURCE/tests/command_line.bash"
n_programs=0

# expect CODE COMMAND...: run with streams in out and err.
expect() {
    local code=$1 got
    shift
    "$@" >out 2>err </dev/null
    got=$?
    [ "$got" = "$code" ] || fail "$*: exit code $got, expected $code: $(head -c 300 err)"
}

for program in "$ANELAST_BIN"/anelast*; do
    [ -x "$program" ] || continue
    name=$(basename "$program")
    n_programs=$((n_programs + 1))

    expect 0 "$program" --help
    [ -s err ] && fail "$name --help writes on standard error: $(head -c 300 err)"
    for words in "Usage: $name" "Example" "Options:" "--help" "--version" "Exit codes: 0"; do
        grep -qF -- "$words" out || fail "$name --help does not say '$words'"
    done
    awk -v name="$name" 'length > 120 { print name " --help: line " NR " has " length " characters"; bad = 1 } END { exit bad }' out ||
        failed=1

    expect 0 "$program" --version
    grep -q "^$name (anelast) [0-9]" out || fail "$name --version says '$(head -1 out)'"

    expect 2 "$program" --no-such-option
    [ -s out ] && fail "$name writes on standard output on wrong usage"
    grep -q "^$name: option '--no-such-option'" err || fail "$name does not name the wrong option: $(head -1 err)"

    "$program" --help >/dev/full 2>err
    [ $? = 3 ] || fail "$name --help on a full disk does not end with 3"
    grep -q "^$name: standard output: " err || fail "$name does not say that standard output cannot be written"

    if "$program" --help | grep -q -- --show-procedure; then
        expect 0 "$program" --show-procedure
        xmllint --noout --schema "$ANELAST_SOURCE/include/anelast/schema/procedure.xsd" out 2>err ||
            fail "$name --show-procedure is not valid: $(head -1 err)"
    fi
done

[ $n_programs -gt 0 ] || fail "no programs in $ANELAST_BIN"
leftover=$(ls | grep -vxE 'out|err')
[ -z "$leftover" ] || fail "left behind: $leftover"
exit $failed
