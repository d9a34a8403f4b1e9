/* units.h: the unit table, for quantity.c. */
#ifndef ANELAST_UNITS_H
#define ANELAST_UNITS_H

#include "anelast/quantity.h"

/* an_unit_find: the row whose code or alias is s [n], without combinations; NULL where there is none. */
const an_unit *an_unit_find(const char *s, size_t n);

#endif
