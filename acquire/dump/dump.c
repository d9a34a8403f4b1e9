/* One way into all dumps, and the rule by which the text beside a binary dump is found. */
#include "anelast/dump.h"

#include "acquire/dump/counts.h"
#include "acquire/dump/text.h"

#include <stdio.h>
#include <string.h>

an_status an_dump_sidecar(const char *dump, const an_layout *layout, char *path, size_t n_path, an_error *err)
{
    const char *folder = strrchr(dump, '/'), *dot = strrchr(dump, '.');
    path[0] = '\0';
    if (!layout->counts.present || !layout->counts.sidecar)
        return AN_OK;
    size_t n_stem = dot && (!folder || dot > folder + 1) ? (size_t)(dot - dump) : strlen(dump);
    int n = snprintf(path, n_path, "%.*s%s", (int)n_stem, dump, layout->counts.sidecar);
    return n >= 0 && (size_t)n < n_path ? AN_OK : an_fail(err, AN_E_LIMIT, dump, "the path is too long");
}

an_status an_dump_read(const an_dump_source *source, const an_dump_visitor *visitor, an_remark_list *remarks,
                       an_error *err)
{
    if (!source->layout->counts.present)
        return an_text_dump_read(source, visitor, remarks, err);
    if (source->layout->counts.sidecar && !source->sidecar)
        return an_fail(err, AN_E_USAGE, source->path, "the text beside the dump is not given");
    return an_counts_dump_read(source, visitor, remarks, err);
}
