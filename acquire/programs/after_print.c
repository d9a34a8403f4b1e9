/* after_print.c: what a technician reads after a run, in under 15 lines: usable, partial or repeat, why, what
 * corrections did, glass transition, whether the material superposes, and where the page is. Temperatures in
 * degrees Celsius, as they are set.
 */
#include "acquire/programs/after_run.h"

#include "anelast/quantity.h"
#include "anelast/xml.h"

#include <math.h>
#include <stdarg.h>
#include <stdlib.h>
#include <string.h>

/* HEAD_ID: columns of the run's name before the verdict. LINES: in all. TOP: head, bursts, correction, two of
 * glass. */
enum { COLUMNS = 100, INDENT = 14, TEXT = 2048, HEAD_ID = 64, LINES = 14, TOP = 5 };

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
    append(text, "; ", "%s %.1f °C (u %.2g K)", text_of(reading, "kind"), temperature - AN_ZERO_CELSIUS_K, u);
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

static int columns_of(const char *text)
{
    int n = 0;
    for (; *text; text++)
        n += ((unsigned char)*text & 0xc0) != 0x80;
    return n;
}

/* A reason with what to do about it, and without: where not all fits, what happened goes before what to do.
 */
static void append_reason(const char *reason, char *why, char *brief)
{
    const char *action = strstr(reason, ". ");
    append(why, " | ", "%s", reason);
    append(brief, " | ", "%.*s", action ? (int)(action - reason) : (int)strlen(reason), reason);
}

/* Reasons, and apart from them what to do while the specimen is still in the clamps; n_line lines for both.
 */
static void print_why(const an_xml_node *assessment, int n_line, FILE *out)
{
    char why[TEXT] = "", brief[TEXT] = "", redo[TEXT] = "";
    size_t n = sizeof before_unclamping - 1;
    for (const an_xml_node *reason = an_xml_child(assessment, "reason"); reason;
         reason = an_xml_next(reason, "reason"))
        if (strncmp(reason->text, before_unclamping, n) == 0)
            append(redo, "; ", "%s", reason->text + n);
        else
            append_reason(reason->text, why, brief);
    int n_redo = redo[0] ? 1 + (redo[fitting(redo, COLUMNS - INDENT)] != '\0') : 0;
    if (columns_of(why) >
        (n_line - n_redo) * (COLUMNS - INDENT - 8)) /* some columns are lost at every break */
        memcpy(why, brief, sizeof why);
    put_block(out, "why", n_line - n_redo, why[0] ? why : "nothing was noticed that speaks against it");
    if (redo[0])
        put_block(out, "redo now", n_redo, redo);
}

/* The temperatures covered: a unit that is wrong is seen here first. */
static void add_range(const an_xml_node *grid, char *text)
{
    double least = INFINITY, most = -INFINITY;
    for (const an_xml_node *isotherm = an_xml_child(grid, "isotherm"); isotherm;
         isotherm = an_xml_next(isotherm, "isotherm")) {
        double temperature = number_of(isotherm, "temperature", "value");
        least = fmin(least, temperature);
        most = fmax(most, temperature);
    }
    if (most > least)
        append(text, "", " from %.1f to %.1f °C", least - AN_ZERO_CELSIUS_K, most - AN_ZERO_CELSIUS_K);
    else if (most == least)
        append(text, "", " at %.1f °C", most - AN_ZERO_CELSIUS_K);
}

static an_status print_grid(const an_xml_node *grid, int n_why, FILE *out, an_error *err)
{
    const an_xml_node *assessment;
    AN_TRY(an_xml_need(grid, "assessment", &assessment, err));
    const an_xml_node *largest = an_xml_child(assessment, "largest_correction");
    char text[TEXT] = "";
    size_t n = an_xml_count_children(grid, "isotherm");
    append(text, "", "%s used, %s flagged, %s skipped; %zu isotherm%s", text_of(assessment, "used"),
           text_of(assessment, "flagged"), text_of(assessment, "skipped"), n, n == 1 ? "" : "s");
    add_range(grid, text);
    put_block(out, "bursts", 1, text);
    print_why(assessment, n_why, out);
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
    const char *reason = text_of(superposition, "reason"), *numbers = strstr(reason, ": ");
    double separation = number_of(superposition, "separation", "value") * 180 / M_PI;
    append(text, "", "%s (reduced chi-square %.3g", text_of(superposition, "verdict"),
           number_of(superposition, "reduced_chi_square", "value"));
    if (separation > 0)
        append(text, "", ", isotherms %.2g° apart in phase", separation);
    else if (separation == 0)
        append(text, "", ", phases of isotherms alike within noise");
    append(text, "", "): %.*s", numbers ? (int)(numbers - reason) : (int)strlen(reason), reason);
    put_block(out, "superposes", 2, text);
    an_xml_document_clear(&document);
    return AN_OK;
}

/* Laws of two or three men go by their letters. */
static const char *law_phrase(const char *kind)
{
    static const char *const phrases[][2] = {{"wlf", "WLF law"},
                                             {"vft", "VFT law"},
                                             {"arrhenius", "Arrhenius law"},
                                             {"crossover", "WLF and Arrhenius laws"},
                                             {"polynomial", "polynomial law"}};
    for (size_t i = 0; i < sizeof phrases / sizeof phrases[0]; i++)
        if (strcmp(kind, phrases[i][0]) == 0)
            return phrases[i][1];
    return kind;
}

static an_status print_material(const an_after_run *run, FILE *out, an_error *err)
{
    an_xml_document document = {0};
    char text[TEXT] = "";
    AN_TRY(read_document(run, "material.xml", &document, err));
    const an_xml_node *spectrum = an_xml_child(document.root, "spectrum"),
                      *valid = an_xml_child(document.root, "valid");
    const an_xml_node *law = an_xml_child(document.root, "law");
    append(text, "", "%zu modes at %.1f °C, %s, for %.2g to %.2g s and %.1f to %.1f °C",
           an_xml_count_children(spectrum, "mode"),
           number_of(spectrum, "reference_temperature", "value") - AN_ZERO_CELSIUS_K,
           law ? law_phrase(text_of(law, "kind")) : "no shift law", number_of(valid, "time_from", "value"),
           number_of(valid, "time_to", "value"),
           number_of(valid, "temperature_from", "value") - AN_ZERO_CELSIUS_K,
           number_of(valid, "temperature_to", "value") - AN_ZERO_CELSIUS_K);
    put_block(out, "material", 2, text);
    an_xml_document_clear(&document);
    return AN_OK;
}

/* Superposition and material, or why there is none. */
static an_status print_fit(const an_after_run *run, FILE *out, an_error *err)
{
    if (run->stopped_at[0]) {
        char text[TEXT] = "";
        append(text, "", "no master curve: %s", run->reason);
        put_block(out, "superposes", 3, text);
        return AN_OK;
    }
    AN_TRY(print_master(run, out, err));
    if (!run->no_material[0])
        return print_material(run, out, err);
    char text[TEXT] = "";
    /* the verdict's own numbers, in brackets there, stand above already */
    const char *from = strstr(run->no_material, " ("), *to = from ? strstr(from, "): ") : NULL;
    append(text, "", "none: %.*s%s", to ? (int)(from - run->no_material) : (int)strlen(run->no_material),
           run->no_material, to ? to + 1 : "");
    put_block(out, "material", 2, text);
    return AN_OK;
}

static void print_head(const an_after_run *run, const char *verdict, FILE *out)
{
    char text[TEXT] = "";
    size_t n = fitting(run->id, HEAD_ID);
    append(text, "", "%.*s%s: %s", (int)n, run->id, run->id[n] ? "..." : "", verdict);
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

/* What stands below the grid's lines, so that these can have the room it leaves; to be freed. */
static an_status print_below(const an_after_run *run, char **text, an_error *err)
{
    size_t n;
    FILE *out = open_memstream(text, &n);
    if (!out)
        return an_fail_memory(err, "the summary");
    an_status status = print_fit(run, out, err);
    print_place(run, out);
    if (fclose(out) == 0 && status >= 0)
        return AN_OK;
    free(*text);
    *text = NULL;
    return status < 0 ? status : an_fail_memory(err, "the summary");
}

static int count_lines(const char *text)
{
    int n = 0;
    for (; *text; text++)
        n += *text == '\n';
    return n;
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
    char *below = NULL;
    AN_TRY(print_below(run, &below, err));
    an_status status = read_document(run, "grid.xml", &grid, err);
    if (status >= 0) {
        print_head(run, text_of(an_xml_child(grid.root, "assessment"), "verdict"), out);
        status = print_grid(grid.root, LINES - TOP - count_lines(below), out, err);
    }
    an_xml_document_clear(&grid);
    if (status >= 0)
        fputs(below, out);
    free(below);
    return status;
}
