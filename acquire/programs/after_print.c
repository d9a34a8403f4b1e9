/* after_print.c: what a technician reads after a run, in under 15 lines: usable, partial or repeat, why, what
 * corrections did, glass transition, whether the material superposes, and where the page is. Temperatures in
 * degrees Celsius, as they are set.
 */
#include "acquire/programs/after_run.h"

#include "anelast/xml.h"

#include <math.h>
#include <stdarg.h>
#include <stdlib.h>
#include <string.h>

enum { COLUMNS = 100, INDENT = 14, TEXT = 2048 };

/* Bytes of the text that fit into some columns, cut at a blank where there is one. */
static size_t fitting(const char *text, int n_column)
{
    size_t last_blank = 0, i = 0;
    for (int column = 0; text[i]; i++) {
        if (((unsigned char)text[i] & 0xc0) != 0x80 && column++ == n_column)
            return last_blank > 0 ? last_blank : i;
        if (text[i] == ' ')
            last_blank = i;
    }
    return i;
}

/* Texts come from dumps and documents: control characters, also those of the upper half, never reach the
 * terminal. */
static void put_plain(FILE *out, const char *text, size_t n)
{
    for (size_t i = 0; i < n; i++) {
        unsigned char c = (unsigned char)text[i], next = i + 1 < n ? (unsigned char)text[i + 1] : 0;
        int upper = c == 0xc2 && next >= 0x80 && next < 0xa0;
        fputc(c < 0x20 || c == 0x7f || upper ? '?' : c, out);
        i += (size_t)upper;
    }
}

/* A label and a text of at most n_line lines; what does not fit is on the page. */
static void put_block(FILE *out, const char *label, int n_line, const char *text)
{
    fprintf(out, "  %-*s", INDENT - 2, label);
    for (int i = 1;; i++) {
        size_t n = fitting(text, COLUMNS - INDENT);
        int cut = i == n_line && text[n];
        if (cut)
            n = fitting(text, COLUMNS - INDENT - 4);
        put_plain(out, text, n);
        fputs(cut ? " ...\n" : "\n", out);
        text += n + (text[n] == ' ');
        if (!*text || i == n_line)
            return;
        fprintf(out, "%*s", INDENT, "");
    }
}

__attribute__((format(printf, 3, 4))) static void append(char *text, const char *between, const char *format,
                                                         ...)
{
    size_t n = strlen(text);
    va_list arguments;
    if (n > 0 && n < TEXT)
        n += (size_t)snprintf(text + n, TEXT - n, "%s", between);
    if (n >= TEXT)
        return;
    va_start(arguments, format);
    vsnprintf(text + n, TEXT - n, format, arguments);
    va_end(arguments);
}

static double number_of(const an_xml_node *node, const char *child, const char *attribute)
{
    const an_xml_node *found = an_xml_child(node, child);
    double value = NAN;
    an_error ignored;
    if (found && an_xml_attribute_of(found, attribute))
        an_xml_double(found, attribute, &value, &ignored);
    return value;
}

static const char *text_of(const an_xml_node *node, const char *attribute)
{
    const char *text = node ? an_xml_attribute_of(node, attribute) : NULL;
    return text ? text : "";
}

/* The frequency of a reading that is nearest to 1 Hz, at which glass transitions are compared (ASTM E1640).
 */
static double usual_frequency(const an_xml_node *grid)
{
    double best = NAN;
    for (const an_xml_node *reading = an_xml_child(grid, "reading"); reading;
         reading = an_xml_next(reading, "reading")) {
        double frequency = number_of(reading, "frequency", "value");
        if (frequency > 0 && !(fabs(log(frequency)) >= fabs(log(best))))
            best = frequency;
    }
    return best;
}

static void add_reading(const an_xml_node *reading, char *text)
{
    double temperature = number_of(reading, "temperature", "value");
    if (isnan(temperature)) {
        append(text, "; ", "%s not read (%s)", text_of(reading, "kind"), text_of(reading, "refused"));
        return;
    }
    double u = 0;
    static const char *const parts[] = {"u_noise", "u_form", "u_common"};
    for (int i = 0; i < 3; i++) {
        double part = number_of(reading, "temperature", parts[i]);
        u = hypot(u, isnan(part) ? 0 : part);
    }
    append(text, "; ", "%s %.1f °C (u %.2g K)", text_of(reading, "kind"), temperature - 273.15, u);
}

static void print_glass(const an_xml_node *grid, FILE *out)
{
    char read[TEXT] = "", text[TEXT] = "";
    double frequency = usual_frequency(grid);
    /* what was read stands before what was not */
    for (int refused = 0; refused < 2; refused++)
        for (const an_xml_node *reading = an_xml_child(grid, "reading"); reading;
             reading = an_xml_next(reading, "reading"))
            if (number_of(reading, "frequency", "value") == frequency &&
                refused == (an_xml_attribute_of(reading, "refused") != NULL))
                add_reading(reading, read);
    append(text, "", "at %.3g Hz: %s", frequency, read);
    if (read[0])
        put_block(out, "glass", 2, text);
    else
        put_block(out, "glass", 1, "no reading: too few temperatures at any one frequency");
}

static const char before_unclamping[] = "before unclamping, ";

/* Reasons, and apart from them what to do while the specimen is still in the clamps. */
static void print_why(const an_xml_node *assessment, FILE *out)
{
    char why[TEXT] = "", redo[TEXT] = "";
    size_t n = sizeof before_unclamping - 1;
    for (const an_xml_node *reason = an_xml_child(assessment, "reason"); reason;
         reason = an_xml_next(reason, "reason"))
        if (strncmp(reason->text, before_unclamping, n) == 0)
            append(redo, "; ", "%s", reason->text + n);
        else
            append(why, " | ", "%s", reason->text);
    put_block(out, "why", 2, why[0] ? why : "nothing was noticed that speaks against it");
    if (redo[0])
        put_block(out, "redo now", 2, redo);
}

static an_status print_grid(const an_xml_node *grid, FILE *out, an_error *err)
{
    const an_xml_node *assessment;
    AN_TRY(an_xml_need(grid, "assessment", &assessment, err));
    const an_xml_node *largest = an_xml_child(assessment, "largest_correction");
    char text[TEXT] = "";
    size_t n = an_xml_count_children(grid, "isotherm");
    append(text, "", "%s used, %s flagged, %s skipped; %zu isotherm%s", text_of(assessment, "used"),
           text_of(assessment, "flagged"), text_of(assessment, "skipped"), n, n == 1 ? "" : "s");
    put_block(out, "bursts", 1, text);
    print_why(assessment, out);
    put_block(out, "correction", 1, largest ? largest->text : "none");
    print_glass(grid, out);
    return AN_OK;
}

static an_status read_document(const an_after_run *run, const char *name, an_xml_document *document,
                               an_error *err)
{
    static const char *const streamed[] = {"point", "shift", "cell", NULL};
    char path[PATH_MAX + 64];
    snprintf(path, sizeof path, "%s/%s", run->folder, name);
    an_xml_reading reading = {.streamed = strcmp(name, "master.xml") == 0 ? streamed : NULL};
    return an_xml_read(path, &reading, document, err);
}

static an_status print_master(const an_after_run *run, FILE *out, an_error *err)
{
    an_xml_document document = {0};
    char text[TEXT] = "";
    AN_TRY(read_document(run, "master.xml", &document, err));
    const an_xml_node *superposition = an_xml_child(document.root, "superposition");
    append(text, "", "%s (reduced chi-square %.3g", text_of(superposition, "verdict"),
           number_of(superposition, "reduced_chi_square", "value"));
    if (isfinite(number_of(superposition, "separation", "value")))
        append(text, "", ", isotherms %.2g° apart in phase",
               number_of(superposition, "separation", "value") * 180 / M_PI);
    append(text, "", "): %s", text_of(superposition, "reason"));
    put_block(out, "superposes", 2, text);
    an_xml_document_clear(&document);
    return AN_OK;
}

static an_status print_material(const an_after_run *run, FILE *out, an_error *err)
{
    an_xml_document document = {0};
    char text[TEXT] = "";
    AN_TRY(read_document(run, "material.xml", &document, err));
    const an_xml_node *spectrum = an_xml_child(document.root, "spectrum"),
                      *valid = an_xml_child(document.root, "valid");
    const an_xml_node *law = an_xml_child(document.root, "law");
    append(text, "", "%zu modes at %.1f °C, law %s, for %.2g to %.2g s and %.1f to %.1f °C",
           an_xml_count_children(spectrum, "mode"),
           number_of(spectrum, "reference_temperature", "value") - 273.15,
           law ? text_of(law, "kind") : "none", number_of(valid, "time_from", "value"),
           number_of(valid, "time_to", "value"), number_of(valid, "temperature_from", "value") - 273.15,
           number_of(valid, "temperature_to", "value") - 273.15);
    put_block(out, "material", 1, text);
    an_xml_document_clear(&document);
    return AN_OK;
}

/* Superposition and material, or why there is none. */
static an_status print_fit(const an_after_run *run, FILE *out, an_error *err)
{
    if (run->stopped_at[0]) {
        char text[TEXT] = "";
        append(text, "", "no master curve: %s", run->reason);
        put_block(out, "superposes", 2, text);
        return AN_OK;
    }
    AN_TRY(print_master(run, out, err));
    if (!run->no_material[0])
        return print_material(run, out, err);
    char text[TEXT] = "";
    append(text, "", "none: %s", run->no_material);
    put_block(out, "material", 1, text);
    return AN_OK;
}

static void print_head(const an_after_run *run, const char *verdict, FILE *out)
{
    char text[TEXT] = "";
    append(text, "", "%s: %s", run->id, verdict);
    if (run->about[0])
        append(text, "", " (%s)", run->about);
    put_plain(out, text, fitting(text, COLUMNS));
    fputc('\n', out);
}

/* Which documents were chosen beside the dump, what was replaced, and where the page is. */
static void print_place(const an_after_run *run, FILE *out)
{
    char text[TEXT] = "";
    const char *const chosen[] = {run->layout, run->specimen, run->apparatus};
    if (run->replaced)
        append(text, "", "%s replaced",
               run->replaced == 1 ? "the same reduction" : "another reduction of the same dump");
    const char *between = "; beside the dump: ";
    for (int i = 0; i < 3; i++)
        if (chosen[i][0]) {
            const char *slash = strrchr(chosen[i], '/');
            append(text, between, "%s%s", text[0] ? "" : "beside the dump: ", slash ? slash + 1 : chosen[i]);
            between = ", ";
        }
    if (text[0])
        put_block(out, "chosen", 1, text);
    if (run->no_page[0])
        fprintf(out, "  %-*s%s\n", INDENT - 2, "no page", run->folder);
    else
        fprintf(out, "  %-*s%s/report.html\n", INDENT - 2, "page", run->folder);
}

/* A run without oscillation goes as far as its run document. */
static void print_other(const an_after_run *run, FILE *out)
{
    char text[TEXT] = "";
    append(
        text, "",
        "%d holds or pulls, no oscillation: taken in and kept without loss; no modulus is made of them here",
        run->n_other);
    print_head(run, "taken in", out);
    put_block(out, "bursts", 2, text);
    print_place(run, out);
}

an_status an_after_run_print(const an_after_run *run, FILE *out, an_error *err)
{
    an_xml_document grid = {0};
    if (run->n_oscillation == 0) {
        print_other(run, out);
        return AN_OK;
    }
    if (strcmp(run->stopped_at, "anelast-grid") == 0) {
        print_head(run, "repeat", out);
        put_block(out, "why", 3, run->reason);
        print_place(run, out);
        return AN_OK;
    }
    an_status status = read_document(run, "grid.xml", &grid, err);
    if (status >= 0) {
        print_head(run, text_of(an_xml_child(grid.root, "assessment"), "verdict"), out);
        status = print_grid(grid.root, out, err);
    }
    an_xml_document_clear(&grid);
    AN_TRY(status);
    AN_TRY(print_fit(run, out, err));
    print_place(run, out);
    return AN_OK;
}
