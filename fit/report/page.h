/* fit/report/page.h: the page in the making, and its sections. Folder report only.
 *
 * A section writes HTML to page->out and returns nothing: a failure (no memory, a figure that cannot be drawn) stays in
 * page->status and is handed back at the end.
 */
#ifndef ANELAST_REPORT_PAGE_H
#define ANELAST_REPORT_PAGE_H

#include "anelast/figure.h"
#include "anelast/quantity.h"
#include "anelast/report.h"
#include "fit/report/markup.h"

#define PAGE_COVERAGE 2.0     /* [1] coverage factor of bars and bands, about 95 % */
#define PAGE_BARS     "k = 2" /* what the bars are, in hover texts */

enum { PAGE_CURVE = 240 }; /* points of a drawn curve */

/* One modulus at one temperature and frequency, from the grid where there is one, else from the points. */
typedef struct page_cell {
    int burst;
    int isotherm, line;     /* its group along temperature and along frequency, from 0 */
    bool doubtful;          /* flagged, or left out of fits as an outlier */
    double temperature_C;   /* [degC] */
    double frequency_Hz;    /* [Hz] */
    double modulus_MPa[2];  /* [MPa] storage, loss */
    double u_noise_MPa[2];  /* [MPa] standard, noise part */
    double u_total_MPa[2];  /* [MPa] standard, noise and common parts */
    double loss_factor;     /* [1] */
    double u_loss_factor;   /* [1] standard, both parts */
} page_cell;

/* All cells, by isotherm and then frequency. */
typedef struct page_cells {
    page_cell *cell; /* [n] owned */
    int n;
    int n_isotherm, n_line;
    double temperature_C[2]; /* [degC] least and greatest */
    double frequency_Hz[2];  /* [Hz] least and greatest */
} page_cells;

typedef struct page {
    const an_report *report;
    const an_made *made;
    FILE *out;
    an_status status; /* the first failure */
    an_error *err;    /* its words; NULL allowed */
    int n_figure;     /* figures written so far */
    page_cells cells;
    char letter;      /* 'E' or 'G', the modulus that the geometry gives */
} page;

/* page_cells_make: gather and sort the cells of a report; nothing where it has neither grid nor points.
 * Returns AN_OK or AN_E_MEMORY. */
an_status page_cells_make(page_cells *cells, const an_report *report, an_error *err);
void page_cells_clear(page_cells *cells);

/* page_cell_color: by temperature. page_line_color: by frequency. */
uint32_t page_cell_color(const page_cells *cells, double temperature_C);
uint32_t page_line_color(const page_cells *cells, double frequency_Hz);

/* page_ramp_temperature: put the temperature's colour bar onto a figure. */
void page_ramp_temperature(const page *p, an_figure *figure);

/* page_figure_new: a new figure; NULL where it failed, which the page remembers. page_figure_end: write it with its number
 * and a caption, and free it. With no data in it, a sentence stands in its place.
 *   caption [in] HTML that the program itself wrote */
an_figure *page_figure_new(page *p, const an_figure_spec *spec);
void page_figure_end(page *p, an_figure **figure, const char *caption);

/* page_absent: say that something is not there, and why; both plain. */
void page_absent(page *p, const char *what, const char *why);

/* page_sentence: plain text with a capital letter and a full stop. page_law_name: a law as people call it. */
void page_sentence(FILE *out, const char *text);
const char *page_law_name(an_law_kind kind);

/* page_specimen, page_assessment: from the first document that has one; NULL where none has. */
const an_specimen *page_specimen(const an_report *report);
const an_assessment *page_assessment(const an_report *report);

/* page_reading: of a kind of reading the one whose frequency is nearest to 1 Hz; NULL where none stands. */
const an_reading *page_reading(const an_grid *grid, an_reading_kind kind);

/* page_why: why a document is missing: what the report was told about it or about one it
 * would stand on, else `otherwise`; plain. */
const char *page_why(const an_report *report, an_report_role role, const char *otherwise);

/* page_no_material: why there is no material, in plain words; NULL where there is one. */
const char *page_no_material(const an_report *report);

/* Table cells: short text, words that may wrap, a number by significant digits or by decimals, a number with its uncertainty, an integer. */
void cell_text(FILE *out, const char *text);
void cell_words(FILE *out, const char *text);
void cell_number(FILE *out, double value, int digits);
void cell_fixed(FILE *out, double value, int decimals);
void cell_with_u(FILE *out, double value, double u);
void cell_integer(FILE *out, long value);

/* term_text: a term of a list and what is said of it, both plain; nothing where that is NULL or empty. */
void term_text(FILE *out, const char *name, const char *text);

/* table_begin: a table that scrolls in its own box.
 *   caption [in] plain; heads [in] label text, ended by NULL; @ stands for the modulus's letter */
void table_begin(page *p, const char *caption, const char *const *heads);
void table_end(FILE *out);

/* Tables of section_tables that stand in a file of their own. */
void tables_superposition(page *p);
void table_modes(page *p);

/* The sections, in the order of the page. */
void section_style(page *p);
void section_verdict(page *p);
void section_identity(page *p);
void section_signal(page *p);
void section_moduli(page *p);
void section_superposition(page *p);
void section_spectrum(page *p);
void section_tables(page *p);
void section_remarks(page *p);
void section_provenance(page *p);
void section_cautions(page *p);

#endif
