# Sourced by tests/run.sh and fixtures/demo.sh: install the named Debian packages that are missing, and build.
# Nothing here prints unless something has to be done.

need_packages() {
    local missing=() package
    for package in "$@"; do
        [ "$(dpkg-query -W -f='${db:Status-Abbrev}' "$package" 2>/dev/null)" = "ii " ] || missing+=("$package")
    done
    [ ${#missing[@]} -eq 0 ] && return 0
    local as_root=()
    if [ "$(id -u)" -ne 0 ]; then
        command -v sudo >/dev/null || {
            echo "missing packages: ${missing[*]}; install them as root, or run this as root or where sudo is" >&2
            return 1
        }
        as_root=(sudo)
    fi
    echo "installing: ${missing[*]}"
    "${as_root[@]}" apt-get update -qq &&
        "${as_root[@]}" env DEBIAN_FRONTEND=noninteractive apt-get install -qq -y --no-install-recommends \
            "${missing[@]}" >/dev/null
}

packages_to_build=(gcc libc6-dev cmake ninja-build pkg-config libxml2-dev libgsl-dev libfftw3-dev libssl-dev)
packages_to_test=(libcmocka-dev libxml2-utils python3 python3-numpy python3-scipy python3-lxml chromium)

# testing_of BUILD: ON or OFF as the folder was configured, OFF where it was not yet.
testing_of() {
    local testing
    testing=$(sed -n 's/^BUILD_TESTING:BOOL=//p' "$1/CMakeCache.txt" 2>/dev/null) || true
    echo "${testing:-OFF}"
}

# build SOURCE BUILD TESTING: configure where it was not yet, then bring everything up to date.
build() {
    local source=$1 build=$2 testing=$3
    if [ ! -f "$build/build.ninja" ] || ! grep -q "^BUILD_TESTING:BOOL=$testing\$" "$build/CMakeCache.txt"; then
        cmake -G Ninja -S "$source" -B "$build" -DBUILD_TESTING="$testing" >"$build.log" 2>&1 || {
            cat "$build.log" >&2
            return 1
        }
        rm -f "$build.log"
    fi
    ninja -C "$build" --quiet
}
