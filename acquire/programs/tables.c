/* tables.c: which tables documents have, as data. Heads are agreed with spreadsheets and scripts outside and
 * stay.
 */
#include "acquire/programs/table.h"

#include <string.h>

#define COLUMNS(columns)           columns, sizeof columns / sizeof columns[0]
#define COLUMNS_BUT_FIRST(columns) columns + 1, sizeof columns / sizeof columns[0] - 1

/* The grid's table of cells; a table of points is the same without the isotherm. */
static const an_column cells[] = {
    {"isotherm", "../@n", NULL},
    {"burst", "@burst", NULL},
    {"temperature_K", "temperature/@value", "K"},
    {"frequency_Hz", "frequency/@value", "Hz"},
    {"storage_Pa", "storage/@value", "Pa"},
    {"loss_Pa", "loss/@value", "Pa"},
    {"loss_factor", "loss_factor/@value", "1"},
    {"u_noise_storage_Pa", "storage/@u_noise", "Pa"},
    {"u_noise_loss_Pa", "loss/@u_noise", "Pa"},
    {"u_common_storage_Pa", "storage/@u_common", "Pa"},
    {"u_common_loss_Pa", "loss/@u_common", "Pa"},
    {"remarks", "codes()", NULL},
};

static const an_column covariance[] = {
    {"burst", "../@burst", NULL},
    {"storage_storage_Pa2", "@storage_storage", "Pa2"},
    {"storage_loss_Pa2", "@storage_loss", "Pa2"},
    {"loss_loss_Pa2", "@loss_loss", "Pa2"},
};

static const an_column budget[] = {
    {"burst", "../@burst", NULL},
    {"source", "@source", NULL},
    {"storage_Pa", "@storage", "Pa"},
    {"loss_Pa", "@loss", "Pa"},
};

static const an_column isotherms[] = {
    {"isotherm", "@n", NULL},
    {"direction", "@direction", NULL},
    {"steady", "@steady", NULL},
    {"temperature_K", "temperature/@value", "K"},
    {"u_temperature_K", "temperature/@u", "K"},
    {"set_temperature_K", "set_temperature/@value", "K"},
    {"spread_K", "spread/@value", "K"},
    {"rate_K_s", "rate/@value", "K/s"},
    {"u_rate_K_s", "rate/@u", "K/s"},
};

static const an_column readings[] = {
    {"kind", "@kind", NULL},
    {"from", "@from", NULL},
    {"frequency_Hz", "frequency/@value", "Hz"},
    {"temperature_K", "temperature/@value", "K"},
    {"u_noise_K", "temperature/@u_noise", "K"},
    {"u_form_K", "temperature/@u_form", "K"},
    {"u_common_K", "temperature/@u_common", "K"},
    {"refused", "@refused", NULL},
};

static const an_column reasons[] = {
    {"verdict", "../@verdict", NULL},
    {"reason", "text()", NULL},
};

static const an_column bursts[] = {
    {"burst", "@n", NULL},
    {"step", "@step", NULL},
    {"kind", "@kind", NULL},
    {"set_temperature_K", "set_temperature/@value", "K"},
    {"set_frequency_Hz", "set_frequency/@value", "Hz"},
    {"start_s", "clock/@start", "s"},
    {"interval_s", "clock/@interval", "s"},
    {"samples", "clock/@count", NULL},
    {"remarks", "codes()", NULL},
};

static const an_column signals[] = {
    {"burst", "../@n", NULL},    {"quantity", "@quantity", NULL}, {"unit", "@unit", NULL},
    {"coding", "@coding", NULL}, {"scale", "@scale", NULL},       {"divisor", "@divisor", NULL},
    {"offset", "@offset", NULL}, {"samples", "@count", NULL},
};

static const an_column shifts[] = {
    {"temperature_K", "temperature/@value", "K"}, {"log10_aT", "log10_aT/@value", "1"},
    {"u_log10_aT", "log10_aT/@u", "1"},           {"log10_bT", "log10_bT/@value", "1"},
    {"u_log10_bT", "log10_bT/@u", "1"},
};

static const an_column shift_parts[] = {
    {"temperature_K", "temperature/@value", "K"},     {"determined", "@determined", NULL},
    {"u_temperature_K", "temperature/@u", "K"},       {"u_noise_log10_aT", "log10_aT/@u_noise", "1"},
    {"u_common_log10_aT", "log10_aT/@u_common", "1"}, {"u_noise_log10_bT", "log10_bT/@u_noise", "1"},
    {"u_common_log10_bT", "log10_bT/@u_common", "1"},
};

static const an_column shift_covariance[] = {
    {"log10_aT_then_log10_bT_by_rows", "text()", NULL},
};

static const an_column superposition[] = {
    {"verdict", "@verdict", NULL},
    {"reason", "@reason", NULL},
    {"vertical", "@vertical", NULL},
    {"reference_temperature_K", "reference_temperature/@value", "K"},
    {"chi_square", "chi_square/@value", "1"},
    {"degrees_of_freedom", "@degrees_of_freedom", NULL},
    {"reduced_chi_square", "reduced_chi_square/@value", "1"},
    {"separation_rad", "separation/@value", "rad"},
};

static const an_column trials[] = {
    {"law", "@kind", NULL},
    {"chosen", "@chosen", NULL},
    {"constants", "@constants", NULL},
    {"chi_square", "chi_square/@value", "1"},
    {"criterion", "criterion/@value", "1"},
    {"refused", "@refused", NULL},
};

static const an_column constants[] = {
    {"law", "../@kind", NULL},   {"reference_temperature_K", "../reference_temperature/@value", "K"},
    {"constant", "@name", NULL}, {"value", "@value", NULL},
    {"unit", "@unit", NULL},     {"u", "@u", NULL},
};

static const an_column curve[] = {
    {"isotherm", "@isotherm", NULL},
    {"burst", "@burst", NULL},
    {"temperature_K", "temperature/@value", "K"},
    {"frequency_Hz", "frequency/@value", "Hz"},
    {"reduced_omega_rad_s", "reduced_omega/@value", "rad/s"},
    {"storage_Pa", "storage/@value", "Pa"},
    {"u_storage_Pa", "storage/@u", "Pa"},
    {"loss_Pa", "loss/@value", "Pa"},
    {"u_loss_Pa", "loss/@u", "Pa"},
    {"residual_storage", "residual/@storage", NULL},
    {"residual_loss", "residual/@loss", NULL},
    {"outlier", "@outlier", NULL},
};

static const an_column modes[] = {
    {"relaxation_time_s", "relaxation_time/@value", "s"},
    {"modulus_Pa", "modulus/@value", "Pa"},
    {"relative_weight", "relative_weight/@value", "1"},
    {"trusted", "@trusted", NULL},
};

static const an_column limits[] = {
    {"basis", "../spectrum/@basis", NULL},
    {"end_state", "../spectrum/@end_state", NULL},
    {"reference_temperature_K", "../spectrum/reference_temperature/@value", "K"},
    {"instantaneous_modulus_Pa", "../spectrum/instantaneous_modulus/@value", "Pa"},
    {"long_term_modulus_Pa", "../spectrum/long_term_modulus/@value", "Pa"},
    {"time_from_s", "time_from/@value", "s"},
    {"time_to_s", "time_to/@value", "s"},
    {"temperature_from_K", "temperature_from/@value", "K"},
    {"temperature_to_K", "temperature_to/@value", "K"},
    {"strain_to", "strain_to/@value", "1"},
};

static const an_column cautions[] = {{"caution", "text()", NULL}};

static const an_column scaling[] = {
    {"temperature_K", "temperature/@value", "K"},
    {"log10_bT", "log10_bT/@value", "1"},
};

static const an_column ladder[] = {
    {"burst", "../@burst", NULL},
    {"rung", "@name", NULL},
    {"storage", "@storage", "1"},
    {"loss", "@loss", "1"},
};

static const an_column quality[] = {
    {"burst", "@burst", NULL},
    {"state", "@state", NULL},
    {"samples", "record/@samples", NULL},
    {"cycles", "record/@cycles", NULL},
    {"cycles_dropped", "record/@cycles_dropped", NULL},
    {"second_harmonic", "record/@second_harmonic", NULL},
    {"third_harmonic", "record/@third_harmonic", NULL},
    {"snr_dB", "record/@snr_dB", NULL},
    {"static_force_N", "static_force/@value", "N"},
    {"force_N", "force/@value", "N"},
    {"displacement_m", "displacement/@value", "m"},
    {"strain", "strain/@value", "1"},
    {"stiffness_compliance", "stiffness_compliance/@value", "1"},
};

static const an_column remarks[] = {
    {"code", "@code", NULL},  {"severity", "@severity", NULL}, {"burst", "@burst", NULL},
    {"text", "text()", NULL}, {"action", "@action", NULL},
};

static const an_column inputs[] = {
    {"role", "@role", NULL},
    {"path", "@path", NULL},
    {"sha256", "@sha256", NULL},
};

static const an_column choices[] = {
    {"name", "@name", NULL},
    {"value", "@value", NULL},
    {"unit", "@unit", NULL},
};

static const an_column makers[] = {
    {"by", "@by", NULL},
    {"version", "@version", NULL},
    {"sha256", "@sha256", NULL},
};

static const an_table tables[] = {
    {"points", "points", "point", "one burst reduced: its complex modulus", COLUMNS_BUT_FIRST(cells)},
    {"points", "covariance", "point/noise", "noise covariance of one burst", COLUMNS(covariance)},
    {"points", "budget", "point/common", "what one source of common uncertainty does to one burst",
     COLUMNS(budget)},
    {"points", "ladder", "point/rung", "what one rung of corrections did to one burst, of |K|",
     COLUMNS(ladder)},
    {"points", "quality", "point", "the record of one burst", COLUMNS(quality)},
    {"grid", "cells", "isotherm/cell", "one temperature and frequency: the complex modulus", COLUMNS(cells)},
    {"grid", "isotherms", "isotherm", "one isotherm", COLUMNS(isotherms)},
    {"grid", "ramp", "ramp/cell", "one burst on a ramp", COLUMNS_BUT_FIRST(cells)},
    {"grid", "readings", "reading", "one glass-transition reading", COLUMNS(readings)},
    {"grid", "reasons", "assessment/reason", "one reason of the assessment", COLUMNS(reasons)},
    {"grid", "covariance", "isotherm/cell/noise", "noise covariance of one cell", COLUMNS(covariance)},
    {"grid", "budget", "isotherm/cell/common", "what one source of common uncertainty does to one cell",
     COLUMNS(budget)},
    {"master", "shifts", "shifts/shift", "one isotherm's shift factors", COLUMNS(shifts)},
    {"master", "shift_parts", "shifts/shift", "parts of the uncertainty of one isotherm's shift factors",
     COLUMNS(shift_parts)},
    {"master", "covariance", "shifts/covariance", "noise covariance of all shift factors",
     COLUMNS(shift_covariance)},
    {"master", "superposition", "superposition", "the verdict with its numbers", COLUMNS(superposition)},
    {"master", "laws", "trial", "one shift law that was tried", COLUMNS(trials)},
    {"master", "constants", "trial/law/constant", "one constant of one law", COLUMNS(constants)},
    {"master", "curve", "point", "one cell on the master curve", COLUMNS(curve)},
    {"master", "modes", "spectrum/mode", "one mode of the joint fit", COLUMNS(modes)},
    {"master", "reasons", "assessment/reason", "one reason of the assessment", COLUMNS(reasons)},
    {"material", "modes", "spectrum/mode", "one mode handed over", COLUMNS(modes)},
    {"material", "limits", "valid", "moduli, reference and valid ranges", COLUMNS(limits)},
    {"material", "constants", "law/constant", "one constant of the shift law", COLUMNS(constants)},
    {"material", "scaling", "elastic_scaling/scale", "the elastic scaling at one temperature",
     COLUMNS(scaling)},
    {"material", "cautions", "caution", "one caution", COLUMNS(cautions)},
    {"run", "bursts", "burst", "one burst", COLUMNS(bursts)},
    {"run", "signals", "burst/signal", "one channel of one burst", COLUMNS(signals)},
    {"procedure", "choices", "choice", "one choice", COLUMNS(choices)},
    {"", "remarks", "remark */remark */*/remark", "one remark", COLUMNS(remarks)},
    {"", "inputs", "made/input", "one input", COLUMNS(inputs)},
    {"", "choices", "made/choice", "one choice in force", COLUMNS(choices)},
    {"", "makers", "made/chain/maker", "one maker of the documents behind this one, oldest first",
     COLUMNS(makers)},
};

const an_table *an_table_find(const char *root, const char *name)
{
    for (size_t i = 0; i < sizeof tables / sizeof tables[0]; i++) {
        int here = strcmp(tables[i].root, root) == 0 || tables[i].root[0] == '\0';
        if (here && (!name || strcmp(tables[i].name, name) == 0))
            return &tables[i];
    }
    return NULL;
}

void an_table_list(const char *root, FILE *out)
{
    for (size_t i = 0; i < sizeof tables / sizeof tables[0]; i++)
        if (an_table_find(root, tables[i].name) == &tables[i])
            fprintf(out, "%-12s %s\n", tables[i].name, tables[i].help);
}
