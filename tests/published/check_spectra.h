/* tests/published/check_spectra.h: spectra by name from spectra.txt, for the tables that use them. Include
 * after cmocka.h. */
#ifndef ANELAST_CHECK_SPECTRA_H
#define ANELAST_CHECK_SPECTRA_H

#include "anelast/maxwell.h"
#include "check_table.h"

static inline double check_sum(const double *value, int n)
{
    double sum = 0;
    for (int i = 0; i < n; i++)
        sum += value[i];
    return sum;
}

static inline void check_spectrum_take(const check_row *row, double unit, an_maxwell *model)
{
    double time[CHECK_VALUES], strength[CHECK_VALUES];
    int n = check_numbers(row->field[2], time, CHECK_VALUES);
    assert_true(n > 0);
    assert_int_equal(check_numbers(row->field[3], strength, CHECK_VALUES), n);
    assert_int_equal(an_maxwell_alloc(model, (size_t)n, NULL), AN_OK);
    for (int i = 0; i < n; i++) {
        model->time_s[i] = time[i];
        model->modulus_Pa[i] = unit * strength[i];
    }
    bool rest = strcmp(row->field[1], "1 - sum") == 0;
    model->equilibrium_Pa = unit * (rest ? 1 - check_sum(strength, n) : strtod(row->field[1], NULL));
}

/* check_spectrum: the spectrum that the row's `spectrum=` names, its strengths times `unit`; model is
 * initialised here, the caller clears it. Fails the test where there is none. */
static inline void check_spectrum(const check_row *row, double unit, an_maxwell *model)
{
    char name[64];
    check_given_text(row, "spectrum", name);
    an_maxwell_init(model);
    FILE *table = fopen(ANELAST_SOURCE "/tests/published/spectra.txt", "r");
    assert_non_null(table);
    check_row candidate = {0};
    bool found = false;
    while (!found && check_next(table, &candidate, 6))
        found = strcmp(candidate.field[0], name) == 0;
    fclose(table);
    if (!found) {
        fprintf(stderr, "line %d: no spectrum '%s'\n", row->line, name);
        fail();
    }
    check_spectrum_take(&candidate, unit, model);
}

#endif
