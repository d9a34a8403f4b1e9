/* What this page does not say: the cautions that go with every export. Stage report. They hold for any
 * material; the last one hands the responsibility where it belongs.
 */
#include "fit/report/page.h"

static const char *const cautions[] = {
    "The moduli are those of small strains, of a material taken as linear and alike in all directions unless "
    "the specimen document "
    "says otherwise. Nothing here speaks about strength, fatigue, fracture or wear.",
    "An absolute modulus needs the corrections of the apparatus. Where they were not given, or where the "
    "frame was nearly as soft as "
    "the specimen, compare values only within one machine and one way of clamping.",
    "A master curve speaks for the material as it was tested: dry or wet, aged or fresh, as cured. It "
    "foretells long times only if one "
    "shift moves the whole spectrum and nothing ages meanwhile. Before a design rests on it, hold a separate "
    "specimen under "
    "load for long and compare.",
    "Times, temperatures and strains outside the stated windows are not supported. Where a figure reaches "
    "there it is hatched, and "
    "programs refuse to predict there unless somebody overrides them in writing.",
    "A glass-transition temperature depends on how it was read, on frequency and on heating rate. It is not "
    "a service limit.",
    "The stated uncertainties cover this specimen on this apparatus. How lots and processing differ is "
    "covered only where several were "
    "measured.",
    "An undecided lot is not an accepted lot.",
    "Local codes, the standards agreed with the customer and the judgement of a licensed engineer stand "
    "above this page. A responsible "
    "person reads it and signs.",
};

/* What the material says of itself goes first: its basis, its window, its long end. */
static void material_cautions(page *p)
{
    char text[AN_CAUTION_SIZE];
    if (!p->report->has_material)
        return;
    for (int i = 0; an_material_caution(&p->report->material, i, text); i++) {
        fputs("<li>", p->out);
        markup_plain(p->out, text);
        fputs(".</li>\n", p->out);
    }
}

void section_cautions(page *p)
{
    fputs("<section>\n<h2>Cautions</h2>\n<ul>\n", p->out);
    material_cautions(p);
    for (size_t i = 0; i < sizeof cautions / sizeof cautions[0]; i++)
        fprintf(p->out, "<li>%s</li>\n", cautions[i]);
    fputs("</ul>\n</section>\n", p->out);
}
