/* Tables of what was fitted: shift factors, the laws that were tried, the modes that are handed over. Stage
 * report. */
#include "fit/report/page.h"

#include <math.h>
#include <string.h>

static void table_shifts(page *p)
{
    static const char *const heads[] = {"T (°C)",   "log_{10} a_{T}", "u noise",
                                        "u common", "log_{10} b_{T}", "u noise",
                                        "u common", "Determined",     NULL};
    const an_master *master = &p->report->master;
    table_begin(p, "Shift factors", heads);
    for (int i = 0; i < master->n_shift; i++) {
        const an_shift *s = &master->shift[i];
        fprintf(p->out, "<tr%s>", s->determined ? "" : " class=\"muted\"");
        cell_fixed(p->out, s->temperature_K - AN_ZERO_CELSIUS_K, 2);
        cell_with_u(p->out, s->log10_aT, s->u_log10_aT);
        cell_number(p->out, s->u_noise_log10_aT, 2);
        cell_number(p->out, s->u_common_log10_aT, 2);
        cell_with_u(p->out, s->log10_bT, s->u_log10_bT);
        cell_number(p->out, s->u_noise_log10_bT, 2);
        cell_number(p->out, s->u_common_log10_bT, 2);
        cell_text(p->out, s->determined ? "yes" : "barely");
        fputs("</tr>\n", p->out);
    }
    table_end(p->out);
}

/* UCUM codes of the laws' constants as they are read. */
static const char *unit_shown(const char *code)
{
    static const char *const pairs[][2] = {{"1", ""},      {"J/mol", "J/mol"}, {"K-1", "K⁻¹"},
                                           {"K-2", "K⁻²"}, {"K-3", "K⁻³"},     {"K-4", "K⁻⁴"},
                                           {"K-5", "K⁻⁵"}, {"K-6", "K⁻⁶"}};
    for (size_t i = 0; i < sizeof pairs / sizeof pairs[0]; i++)
        if (strcmp(pairs[i][0], code) == 0)
            return pairs[i][1];
    return code;
}

/* "c1", "E_a" or "T_inf": one letter, the rest lowered. */
static void put_constant_name(FILE *out, const char *name)
{
    char label[32];
    const char *rest = name[0] && name[1] == '_' ? name + 2 : name + 1;
    snprintf(label, sizeof label, "%c_{%s}", name[0], strcmp(rest, "inf") == 0 ? "∞" : rest);
    markup_label(out, label, MARKUP_HTML, 0);
}

static void cell_constants(FILE *out, const an_law *law)
{
    fputs("<td>", out);
    double wlf_K = law->kind == AN_LAW_CROSSOVER ? law->constant[2] : law->reference_temperature_K;
    for (size_t k = 0; k < law->n_constant; k++) {
        const char *unit = unit_shown(an_law_constant_unit(law->kind, k));
        fputs(k ? "<br/>" : "", out);
        put_constant_name(out, an_law_constant_name(law->kind, k));
        fputs(" = ", out);
        markup_with_u(out, law->constant[k], sqrt(law->covariance[k * law->n_constant + k]));
        fprintf(out, "%s%s", unit[0] ? " " : "", unit);
        if (an_law_constant_name(law->kind, k)[0] == 'c') {
            fputs(" at ", out);
            markup_fixed(out, wlf_K - AN_ZERO_CELSIUS_K, 2);
            fputs(" °C", out);
        }
    }
    fputs("</td>", out);
}

static void cell_range(FILE *out, const an_law *law)
{
    fputs("<td class=\"n\">", out);
    bool is_open = !(law->valid_from_K > 0) && !isfinite(law->valid_to_K);
    if (is_open || !(law->valid_to_K > law->valid_from_K)) {
        fputs(is_open ? "open</td>" : "–</td>", out);
        return;
    }
    if (law->valid_from_K > 0)
        markup_fixed(out, law->valid_from_K - AN_ZERO_CELSIUS_K, 1);
    else
        fputs("open", out);
    fputs(" to ", out);
    if (isfinite(law->valid_to_K))
        markup_fixed(out, law->valid_to_K - AN_ZERO_CELSIUS_K, 1);
    else
        fputs("open", out);
    fputs("</td>", out);
}

static void table_laws(page *p)
{
    static const char *const heads[] = {"Law", "Constants", "Valid (°C)", "χ²", "Criterion", "Outcome", NULL};
    const an_master *master = &p->report->master;
    if (master->n_trial == 0) {
        page_absent(p, "No shift law.", "No law was tried on these shift factors.");
        return;
    }
    table_begin(p, "Shift laws tried, constants with the noise part of u; the smallest criterion is chosen",
                heads);
    for (int i = 0; i < master->n_trial; i++) {
        const an_law_trial *trial = &master->trial[i];
        fprintf(p->out, "<tr%s>", trial->chosen ? "" : " class=\"muted\"");
        cell_text(p->out, page_law_name(trial->law.kind));
        cell_constants(p->out, &trial->law);
        cell_range(p->out, &trial->law);
        cell_number(p->out, trial->chi_square, 4);
        cell_number(p->out, trial->criterion, 4);
        cell_words(p->out, trial->chosen ? "chosen" : trial->reason[0] ? trial->reason : "not chosen");
        fputs("</tr>\n", p->out);
    }
    table_end(p->out);
}

void tables_superposition(page *p)
{
    table_laws(p);
    table_shifts(p);
}

void table_modes(page *p)
{
    static const char *const heads[] = {"Relaxation time τ (s)", "@_{i} (MPa)", "u noise (MPa)",
                                        "@_{i}/@_{0}",           "Trusted",     NULL};
    const an_material *m = &p->report->material;
    table_begin(p, "Prony series, weights relative to the instantaneous modulus", heads);
    for (size_t i = 0; i < m->modes.n_mode; i++) {
        bool trusted = !m->trusted || m->trusted[i];
        fprintf(p->out, "<tr%s>", trusted ? "" : " class=\"muted\"");
        cell_number(p->out, m->modes.time_s[i], 5);
        cell_number(p->out, m->modes.modulus_Pa[i] / 1e6, 5);
        cell_number(p->out, m->u_modulus_Pa ? m->u_modulus_Pa[i] / 1e6 : NAN, 2);
        cell_number(p->out, m->modes.modulus_Pa[i] / m->instantaneous_Pa, 5);
        cell_text(p->out, trusted ? "yes" : "no, edge of the window");
        fputs("</tr>\n", p->out);
    }
    fputs("<tr><td>long-term</td>", p->out);
    cell_number(p->out, m->long_term_Pa / 1e6, 5);
    cell_number(p->out, m->long_term_Pa > 0 ? m->u_long_term_Pa / 1e6 : NAN, 2);
    cell_number(p->out, m->long_term_Pa / m->instantaneous_Pa, 5);
    fputs("<td></td></tr>\n", p->out);
    table_end(p->out);
}
