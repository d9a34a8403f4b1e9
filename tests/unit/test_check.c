/* The comparator itself: it must fail where it should, above all on NaN. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>

#include "check.h"

static void nan_never_passes(void **state)
{
    (void)state;
    assert_false(check_is_close(NAN, 1, 1e9));
    assert_false(check_is_close(1, NAN, 1e9));
    assert_false(check_is_close(NAN, NAN, 1e9));
    assert_false(check_is_close(1, 1, NAN));
    assert_false(check_is_close(NAN, NAN, INFINITY));
}

static void the_tolerance_counts(void **state)
{
    (void)state;
    assert_true(check_is_close(1.5, 1, 0.5));
    assert_false(check_is_close(1.6, 1, 0.5));
    assert_false(check_is_close(-1, 1, 0.5));
    assert_false(check_is_close(1, 1, -1e-30));
}

static void infinities_match_only_themselves(void **state)
{
    (void)state;
    assert_true(check_is_close(INFINITY, INFINITY, 0));
    assert_false(check_is_close(-INFINITY, INFINITY, 1));
    assert_false(check_is_close(1e308, INFINITY, 1));
    assert_false(check_is_close(INFINITY, 1, 1e9));
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(nan_never_passes),
        cmocka_unit_test(the_tolerance_counts),
        cmocka_unit_test(infinities_match_only_themselves),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
