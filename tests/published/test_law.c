/* The shift laws against published constants and exact algebra: law.txt. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>

#include "anelast/law.h"
#include "check_table.h"

static an_law wlf(const check_row *row)
{
    an_law law;
    an_law_init(&law, AN_LAW_WLF, check_given(row, "T0"), 0);
    law.constant[0] = check_given(row, "c1");
    law.constant[1] = check_given(row, "c2");
    return law;
}

static an_status wlf_at(const check_row *row, double *actual, an_error *err)
{
    an_law law = wlf(row);
    AN_TRY(an_law_check(&law, err));
    return an_law_log10_aT(&law, check_given(row, "T"), AN_RANGE_REFUSE, actual, err);
}

static an_status wlf_move(const check_row *row, double *actual, an_error *err)
{
    an_law law = wlf(row);
    AN_TRY(an_law_change_reference(&law, check_given(row, "to"), &law, err));
    actual[0] = law.constant[0];
    actual[1] = law.constant[1];
    return AN_OK;
}

static an_status wlf_energy(const check_row *row, double *actual, an_error *err)
{
    an_law law = wlf(row);
    (void)err;
    *actual = an_law_activation_energy(&law, check_given(row, "T"));
    return AN_OK;
}

static an_status wlf_as_vft(const check_row *row, double *actual, an_error *err)
{
    an_law law;
    an_law_init(&law, AN_LAW_VFT, check_given(row, "T0"), 0);
    law.constant[0] = log(10) * check_given(row, "c1") * check_given(row, "c2");
    law.constant[1] = check_given(row, "T0") - check_given(row, "c2");
    AN_TRY(an_law_check(&law, err));
    return an_law_log10_aT(&law, check_given(row, "T"), AN_RANGE_REFUSE, actual, err);
}

static an_status arrhenius(const check_row *row, double *actual, an_error *err)
{
    an_law law;
    an_law_init(&law, AN_LAW_ARRHENIUS, check_given(row, "T0"), 0);
    law.constant[0] = check_given(row, "E");
    AN_TRY(an_law_check(&law, err));
    return an_law_log10_aT(&law, check_given(row, "T"), AN_RANGE_REFUSE, actual, err);
}

static an_status crossover(const check_row *row, double *actual, an_error *err)
{
    an_law law;
    an_law_init(&law, AN_LAW_CROSSOVER, check_given(row, "T0"), 0);
    law.constant[0] = check_given(row, "c1");
    law.constant[1] = check_given(row, "c2");
    law.constant[2] = check_given(row, "Tx");
    law.constant[3] = check_given(row, "E");
    AN_TRY(an_law_check(&law, err));
    return an_law_log10_aT(&law, check_given(row, "T"), AN_RANGE_REFUSE, actual, err);
}

static void table(void **state)
{
    (void)state;
    const check_quantity quantity[] = {
        {"wlf at", wlf_at},         {"wlf move", wlf_move},   {"wlf energy", wlf_energy},
        {"wlf as vft", wlf_as_vft}, {"arrhenius", arrhenius}, {"crossover", crossover},
    };
    check_table_run("law.txt", quantity, sizeof quantity / sizeof quantity[0]);
}

int main(void)
{
    const struct CMUnitTest tests[] = {cmocka_unit_test(table)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
