#!/usr/bin/env bash
# An installation under a prefix of its own: a program that links it by pkg-config and one by find_package, and the
# installed anelast with the installed schemas.
. "$ANELAST_SOURCE/tests/command_line.bash"
rm -rf prefix built results
cmake --install "$ANELAST_BIN/.." --prefix "$PWD/prefix" >install.log 2>&1 || { cat install.log; exit 1; }

# 273.15 K + 25 degC: the kelvin scale's offset by definition (SI Brochure, 9th edition, section 2.3.1).
cat >uses.c <<'C'
#include <anelast/maxwell.h>
#include <anelast/quantity.h>
#include <math.h>

int main(void)
{
    an_error err = {0};
    an_maxwell model;
    double kelvin = 0;
    an_maxwell_init(&model);
    an_status status = an_maxwell_alloc(&model, 3, &err);
    an_maxwell_clear(&model);
    return status < 0 || an_quantity_parse("25 degC", "K", &kelvin, &err) < 0 || !(fabs(kelvin - 298.15) < 1e-9);
}
C
pc=$(dirname "$(find prefix -name anelast.pc)")
read -ra flags <<<"$(PKG_CONFIG_PATH=$pc pkg-config --cflags --libs anelast)"
printf '%s\n' "${flags[@]}" | grep -q "^-I$PWD/prefix/" || printf '%s\n' "${flags[@]}" | grep -q '^-Iprefix/' ||
    fail "pkg-config does not lead to the prefix: ${flags[*]}"
library=$(dirname "$(find "$PWD/prefix" -name libanelast.so)")
cc -o by_pkg_config uses.c "${flags[@]}" -lm || fail "a program by pkg-config does not build"
LD_LIBRARY_PATH=$library ./by_pkg_config || fail "the program built by pkg-config ends with $?"

mkdir -p built/source
cp uses.c built/source
cat >built/source/CMakeLists.txt <<'CMAKE'
cmake_minimum_required(VERSION 3.25)
project(uses LANGUAGES C)
find_package(anelast REQUIRED)
add_executable(uses uses.c)
target_link_libraries(uses PRIVATE anelast::anelast m)
CMAKE
{ cmake -G Ninja -S built/source -B built/tree -DCMAKE_PREFIX_PATH="$PWD/prefix" && cmake --build built/tree; } >built.log 2>&1 ||
    { cat built.log; fail "a program by find_package does not build"; }
built/tree/uses || fail "the program built by find_package ends with $?"

lab=$ANELAST_SOURCE/fixtures/lower_quay/rail_pad
schemas=$PWD/prefix/include/anelast/schema
diff -r "$ANELAST_SOURCE/include/anelast/schema" "$schemas" >/dev/null || fail "the installed schemas are other ones"
prefix/bin/anelast "$lab/RP-0522-1.csv" --layout "$lab/layout.xml" --specimen "$lab/specimen.xml" \
    --apparatus "$lab/apparatus.xml" --into results >out.txt 2>err.txt || fail "the installed anelast: $(cat err.txt)"
[ -s "$(find results -name material.xml)" ] || fail "the installed anelast made no material"

# it is the installed schemas that the installed programs read, not the source's
rm "$schemas/grid.xsd"
prefix/bin/anelast-table "$(find results -name grid.xml)" >out.txt 2>err.txt && fail "a schema that is gone was not missed"
grep -q "no schema grid.xsd in .*prefix" err.txt || fail "where the schema was looked for: $(cat err.txt)"
exit $failed
