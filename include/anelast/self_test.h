/* anelast/self_test.h: a layout tried on the excerpt that it carries, so that a change of the layout, or of
 * this program, that reads an instrument's dumps otherwise is found at once.
 */
#ifndef ANELAST_SELF_TEST_H
#define ANELAST_SELF_TEST_H

#include "anelast/layout.h"
#include "anelast/status.h"

/* What came of it. */
typedef struct an_self_test_result {
    int n_burst;  /* bursts in the excerpt */
    int n_expect; /* expectations that were met */
} an_self_test_result;

/* an_self_test_run: read the excerpt of a layout's <self_test> as a dump, and compare what it expects.
 *   layout [in]  loaded
 *   path   [in]  of the layout, for messages
 * Returns AN_OK; AN_E_DOCUMENT (the layout has no self-test), AN_E_VALUE naming the expectation that was not
 * met, what was got and what was expected, or the refusal of the excerpt. */
an_status an_self_test_run(const an_layout *layout, const char *path, an_self_test_result *result,
                           an_error *err);

#endif
