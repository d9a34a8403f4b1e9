/* The page as a whole: the order of its sections. Stage report. The page is HTML that is well-formed XML too,
 * so that any XML tool can take it apart; numbers and texts come from documents only.
 */
#include "fit/report/page.h"

static void write_head(page *p)
{
    const an_specimen *specimen = page_specimen(p->report);
    fputs("<!DOCTYPE html>\n<html lang=\"en\" xmlns=\"http://www.w3.org/1999/xhtml\">\n<head>\n<meta "
          "charset=\"utf-8\"/>\n"
          "<meta name=\"viewport\" content=\"width=device-width, initial-scale=1\"/>\n<title>",
          p->out);
    markup_plain(p->out, specimen->material[0] ? specimen->material : "Material not named");
    fputs(", lot ", p->out);
    markup_plain(p->out, specimen->lot[0] ? specimen->lot : "not named");
    fputs(": dynamic mechanical reduction</title>\n", p->out);
    section_style(p);
    fputs("</head>\n<body>\n", p->out);
}

static void write_foot(page *p)
{
    fputs("<footer>\n<p>Made by ", p->out);
    markup_plain(p->out, p->made->by);
    fputc(' ', p->out);
    markup_plain(p->out, p->made->version);
    fputs(" at ", p->out);
    markup_plain(p->out, p->made->at);
    fputs(".</p>\n</footer>\n</body>\n</html>\n", p->out);
}

static char modulus_letter(const an_report *r)
{
    bool shear = r->has_material ? r->material.is_shear != 0
                                 : an_geometry_is_shear(page_specimen(r)->geometry.kind) != 0;
    return shear ? 'G' : 'E';
}

an_status an_report_write(const an_report *report, const an_made *made, FILE *out, an_error *err)
{
    if (!page_specimen(report))
        return an_fail(err, AN_E_USAGE, NULL, "a page needs at least one document");
    page p = {.report = report, .made = made, .out = out, .err = err, .letter = modulus_letter(report)};
    AN_TRY(page_cells_make(&p.cells, report, err));
    write_head(&p);
    fputs("<header>\n", out);
    section_verdict(&p);
    section_identity(&p);
    fputs("</header>\n<main>\n", out);
    section_signal(&p);
    section_moduli(&p);
    section_superposition(&p);
    section_spectrum(&p);
    section_tables(&p);
    section_remarks(&p);
    section_provenance(&p);
    section_cautions(&p);
    fputs("</main>\n", out);
    write_foot(&p);
    page_cells_clear(&p.cells);
    return p.status < 0 ? p.status : AN_OK;
}
