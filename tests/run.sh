#!/usr/bin/env bash
# Install what is missing, build, and run every test. Arguments go to ctest, e.g. `tests/run.sh -R phase`.
set -eu
top=$(cd "$(dirname "$0")/.." && pwd)
. "$top/tests/prepare.sh"
need_packages "${packages_to_build[@]}" "${packages_to_test[@]}"
build "$top" "$top/build" ON
exec ctest --test-dir "$top/build" --output-on-failure -j "$(nproc)" "$@"
