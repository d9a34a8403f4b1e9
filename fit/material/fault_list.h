/* Several faults in one error: each is appended to the text, so that a reader sees all that is wrong at once.
 */
#ifndef ANELAST_FAULT_LIST_H
#define ANELAST_FAULT_LIST_H

#include "anelast/status.h"

/* an_fault_add: append a fault to err (NULL allowed), "; " between two; what does not fit is cut with " ...".
 *   status  [in, out] becomes AN_E_VALUE */
void an_fault_add(an_error *err, an_status *status, const char *format, ...)
    __attribute__((format(printf, 3, 4)));

#endif
