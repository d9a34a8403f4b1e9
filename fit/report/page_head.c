/* The head of the page: its style, the verdict with its reasons and what to do, and what was tested. Stage
 * report. The verdict is the grid document's; the page adds whether the isotherms superposed and whether
 * there is a material.
 */
#include "fit/report/page.h"

#include <math.h>
#include <string.h>

static const char style[] =
    ":root{color-scheme:light}\n"
    "*{box-sizing:border-box}\n"
    "body{margin:0;background:#f6f7f5;color:#1b2a33;font:16px/1.5 system-ui,'DejaVu Sans',sans-serif}\n"
    "main,header,footer{max-width:1180px;margin:0 auto;padding:0 18px}\n"
    "h1{font-size:1.35rem;margin:1.1rem 0 .2rem;line-height:1.25}\n"
    "h2{font-size:1.15rem;margin:2.2rem 0 .6rem;padding-top:.5rem;border-top:2px solid #1b2a33}\n"
    "h3{font-size:1rem;margin:1.4rem 0 .4rem}\n"
    "p,ul,ol{margin:.4rem 0 .8rem;max-width:46rem}\n"
    ".verdict{margin:18px 0 0;padding:14px 18px;background:#fff;border:1px solid #aeb6bb;border-left:12px "
    "solid #5e6b74}\n"
    ".verdict .word{font-size:1.7rem;font-weight:700;line-height:1.2;margin:0}\n"
    ".usable{border-left-color:#1f6b4a}.usable .word{color:#1f6b4a}\n"
    ".partial{border-left-color:#8a5a00;border-left-style:double}.partial .word{color:#8a5a00}\n"
    ".repeat{border-left-color:#9c2a1e;border-left-style:dashed}.repeat .word{color:#9c2a1e}\n"
    ".verdict .sub{font-weight:700;margin:.7rem 0 .1rem}\n"
    "dl{display:grid;grid-template-columns:max-content 1fr;gap:.15rem 1rem;margin:.4rem 0 .8rem}\n"
    "dt{color:#4c5a63}dd{margin:0;overflow-wrap:anywhere}\n"
    ".figures{display:grid;grid-template-columns:repeat(2,minmax(0,1fr));gap:18px;align-items:start}\n"
    "figure{margin:0;padding:12px;background:#fff;border:1px solid #d9dee1;break-inside:avoid}\n"
    "figure svg{display:block;width:100%;height:auto}\n"
    "figcaption{font-size:.88rem;color:#36454e;margin-top:.5rem}\n"
    ".scroll{overflow-x:auto;background:#fff;border:1px solid #d9dee1;margin:.8rem 0 1.2rem}\n"
    ".tall{max-height:34rem;overflow:auto}\n"
    "table{border-collapse:collapse;font-size:.88rem}\n"
    "caption{text-align:left;font-weight:600;padding:8px 10px;break-after:avoid}\n"
    "th,td{padding:4px 10px;text-align:left;vertical-align:top;border-top:1px solid #e4e8ea}\n"
    "th{white-space:nowrap;background:#eef1f2;font-weight:600}\n"
    "td{white-space:nowrap}td.w{white-space:normal;min-width:15rem;max-width:34rem}"
    "td.b{white-space:normal;min-width:8rem;max-width:14rem}\n"
    "caption span{position:sticky;left:10px;display:inline-block;max-width:min(84vw,60rem)}\n"
    "td.n{text-align:right;font-variant-numeric:tabular-nums}\n"
    "tr.muted td{color:#5e6b74}\n"
    ".absent{background:#fff;border:1px dashed #5e6b74;padding:8px 12px}\n"
    "code{font-size:.82rem;overflow-wrap:anywhere}\n"
    "summary{cursor:pointer;font-weight:600;margin:.4rem 0}\n"
    "footer{color:#4c5a63;font-size:.88rem;padding-bottom:2rem}\n"
    "@media screen and "
    "(max-width:860px){.figures{grid-template-columns:minmax(0,1fr)}main,header,footer{padding:0 10px}"
    "figure{padding:6px 4px}figcaption{padding:0 6px}dl{grid-template-columns:minmax(0,2fr) minmax(0,3fr)}}\n"
    "@media print{body{background:#fff;font-size:10pt}table{font-size:.72rem}th,td{padding:2px "
    "5px}.figures{gap:8px}main,header,footer{max-width:none;padding:0}"
    ".scroll,.tall{overflow:visible;max-height:none;border:0}thead{display:table-header-group}tr{break-"
    "inside:avoid}"
    "h2,h3{break-after:avoid}figure{border:0;padding:0}@page{size:A4;margin:14mm}}\n";

void section_style(page *p)
{
    fputs("<style>\n", p->out);
    fputs(style, p->out);
    fputs("</style>\n", p->out);
}

static const char *verdict_title(an_verdict verdict)
{
    switch (verdict) {
    case AN_USABLE:
        return "Usable";
    case AN_PARTIAL:
        return "Usable in part";
    default:
        return "Repeat the run";
    }
}

/* Reasons that say what to do while the specimen is still clamped open with these words. */
static const char before[] = "before unclamping, ";

static const char *what_to_do(const char *reason)
{
    return strncmp(reason, before, sizeof before - 1) == 0 ? reason + sizeof before - 1 : NULL;
}

static void write_item(FILE *out, const char *text)
{
    fputs("<li>", out);
    page_sentence(out, text);
    fputs("</li>\n", out);
}

static void write_reasons(FILE *out, const an_assessment *assessment)
{
    int n_why = 0;
    for (int i = 0; i < assessment->n_reason; i++)
        n_why += !what_to_do(assessment->reason[i]);
    if (n_why == 0)
        return;
    fputs("<ul>\n", out);
    for (int i = 0; i < assessment->n_reason; i++)
        if (!what_to_do(assessment->reason[i]))
            write_item(out, assessment->reason[i]);
    fputs("</ul>\n", out);
}

static void write_superposition(FILE *out, const an_report *report)
{
    if (!report->has_master)
        return;
    fputs("<p><b>Superposition: ", out);
    markup_plain(out, an_simplicity_word(report->master.simplicity));
    fputs(".</b> ", out);
    page_sentence(out, report->master.simplicity_reason);
    fputs("</p>\n", out);
}

static void write_before_unclamping(FILE *out, const an_assessment *assessment)
{
    int n_said = 0;
    fputs("<p class=\"sub\">Before unclamping</p>\n<ul>\n", out);
    for (int i = 0; i < assessment->n_reason; i++)
        if (what_to_do(assessment->reason[i])) {
            write_item(out, what_to_do(assessment->reason[i]));
            n_said++;
        }
    if (n_said == 0)
        fputs(assessment->verdict == AN_USABLE
                  ? "<li>Nothing more is needed from this specimen.</li>\n"
                  : "<li>Leave the specimen clamped until the reasons above are dealt with.</li>\n",
              out);
    fputs("</ul>\n", out);
}

static void write_transition(FILE *out, const an_grid *grid)
{
    int n_written = 0;
    fputs("<dt>Glass transition</dt><dd>", out);
    for (int kind = AN_READING_STORAGE_ONSET; kind <= AN_READING_LOSS_FACTOR_PEAK; kind++) {
        const an_reading *r = page_reading(grid, (an_reading_kind)kind);
        if (!r)
            continue;
        fprintf(out, "%s%s ", n_written++ ? "; " : "", an_reading_word(r->kind));
        double u = hypot(hypot(r->u_noise_K, r->u_form_K), r->u_common_K);
        markup_with_u(out, r->temperature_K - AN_ZERO_CELSIUS_K, u);
        fputs(" °C at ", out);
        markup_number(out, r->frequency_Hz, 3);
        fputs(" Hz", out);
    }
    fputs(n_written ? "</dd>\n" : "no reading; the table of readings says why</dd>\n", out);
}

static void write_facts(FILE *out, const an_report *report, const an_assessment *assessment)
{
    fprintf(out, "<dl>\n<dt>Bursts</dt><dd>%d used, %d flagged, %d skipped</dd>\n", assessment->n_used,
            assessment->n_flagged, assessment->n_skipped);
    if (assessment->largest_correction[0]) {
        fputs("<dt>Largest correction</dt><dd>", out);
        markup_plain(out, assessment->largest_correction);
        fputs("</dd>\n", out);
    }
    if (report->has_grid)
        write_transition(out, &report->grid);
    fputs("</dl>\n", out);
}

void section_verdict(page *p)
{
    const an_assessment *assessment = page_assessment(p->report);
    fprintf(p->out, "<section class=\"verdict %s\" aria-label=\"Verdict\">\n<p class=\"word\">",
            assessment ? an_verdict_word(assessment->verdict) : "none");
    if (!assessment) {
        fputs("No verdict</p>\n<p>", p->out);
        page_sentence(p->out,
                      page_why(p->report, AN_REPORT_GRID,
                               "Only the grid and master documents carry one, and neither was given"));
        fputs("</p>\n", p->out);
    } else {
        fprintf(p->out, "%s</p>\n", verdict_title(assessment->verdict));
        write_reasons(p->out, assessment);
    }
    write_superposition(p->out, p->report);
    const char *no_material = page_no_material(p->report);
    if (!p->report->has_master && p->report->missing[AN_REPORT_MASTER][0])
        page_absent(p, "No master curve.", p->report->missing[AN_REPORT_MASTER]);
    if (no_material && p->report->has_master)
        page_absent(p, "No material.", no_material);
    if (assessment) {
        write_facts(p->out, p->report, assessment);
        write_before_unclamping(p->out, assessment);
    }
    fputs("</section>\n", p->out);
}

typedef struct dimension_row {
    const char *name;   /* plain */
    const char *unit;   /* plain */
    double per_unit;    /* [SI unit / unit] */
    an_measure measure; /* [SI unit] */
} dimension_row;

static void dimension(FILE *out, const dimension_row *row, int *n_written)
{
    if (!isfinite(row->measure.value))
        return;
    fprintf(out, "%s%s ", (*n_written)++ ? "; " : "", row->name);
    markup_with_u(out, row->measure.value / row->per_unit, row->measure.u / row->per_unit);
    fprintf(out, "%s%s", row->unit[0] ? " " : "", row->unit);
}

static void write_geometry(FILE *out, const an_geometry *g)
{
    const dimension_row rows[] = {
        {"length", "mm", 1e-3, g->length},
        {"width", "mm", 1e-3, g->width},
        {"thickness", "mm", 1e-3, g->thickness},
        {"diameter", "mm", 1e-3, g->diameter},
        {"height", "mm", 1e-3, g->height},
        {"area", "mm²", 1e-6, g->area},
        {"added length", "mm", 1e-3, g->added_length},
        {"Poisson ratio", "", 1, g->poisson},
        {"E/G", "", 1, g->modulus_ratio},
        {"shape factor", "", 1, g->shape_factor},
        {"bulk modulus", "GPa", 1e9, g->bulk_modulus},
    };
    int n_written = 0;
    fputs("<dt>Dimensions</dt><dd>", out);
    for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++)
        dimension(out, &rows[i], &n_written);
    fputs(n_written ? "</dd>\n" : "not given</dd>\n", out);
}

static const char *run_id(const an_report *r)
{
    return r->has_run      ? r->run.id
           : r->has_points ? r->points.id
           : r->has_grid   ? r->grid.id
           : r->has_master ? r->master.id
                           : r->material.id;
}

void section_identity(page *p)
{
    const an_specimen *specimen = page_specimen(p->report);
    fputs("<section aria-label=\"What was tested\">\n<h1>", p->out);
    markup_plain(p->out, specimen->material[0] ? specimen->material : "Material not named");
    fputs("</h1>\n<dl>\n", p->out);
    term_text(p->out, "Specimen", specimen->id[0] ? specimen->id : "not named");
    term_text(p->out, "Lot", specimen->lot[0] ? specimen->lot : "not named");
    term_text(p->out, "Run", run_id(p->report));
    term_text(p->out, "Tested", specimen->started);
    term_text(p->out, "Operator", specimen->operator_name);
    term_text(p->out, "Rig", specimen->rig);
    term_text(p->out, "Geometry", an_geometry_word(specimen->geometry.kind));
    write_geometry(p->out, &specimen->geometry);
    if (p->report->has_points) {
        const an_apparatus *apparatus = &p->report->points.apparatus;
        term_text(p->out, "Apparatus", apparatus->id);
        term_text(p->out, "Calibrated", apparatus->calibrated);
        term_text(p->out, "Calibration ends", apparatus->valid_until);
        term_text(p->out, "Certificate", apparatus->certificate);
    }
    fputs("</dl>\n</section>\n", p->out);
}
