/* beside.h: the documents that stand beside a dump, for who does not name them.
 */
#ifndef ANELAST_BESIDE_H
#define ANELAST_BESIDE_H

#include "anelast/status.h"

#include <stddef.h>

/* an_beside_find: the document of a kind beside a dump: `kind.xml`, or else the only document in its folder
 * with that root. dump [in] path; kind [in] "layout", "specimen" or "apparatus"; path [out] [n_path], ""
 * where there is none Returns AN_OK; AN_E_USAGE where there are several and none is called kind.xml. */
an_status an_beside_find(const char *dump, const char *kind, char *path, size_t n_path, an_error *err);

#endif
