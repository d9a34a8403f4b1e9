# Sourced first by the tests of the command line in tests/cli: what they all say. They end with `exit $failed`.
set -u
bin=$ANELAST_BIN
failed=0

fail() {
    echo "FAIL $*"
    failed=1
}

# expect_code CODE WHAT COMMAND...: run it with its streams in out.txt and err.txt, and hold its exit code.
expect_code() {
    local code=$1 what=$2
    shift 2
    "$@" >out.txt 2>err.txt
    local got=$?
    [ "$got" -eq "$code" ] || {
        fail "$what: exit $got, expected $code"
        cat out.txt err.txt | head -40
    }
}
