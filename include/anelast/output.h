/* anelast/output.h: files that appear whole or not at all. What is written goes to a file beside the place,
 * which is flushed, synced and renamed when all is well; a reader sees an old document, a whole new one, or
 * none. "-" is standard output.
 */
#ifndef ANELAST_OUTPUT_H
#define ANELAST_OUTPUT_H

#include "anelast/status.h"

#include <stdio.h>

/* An output in the making. */
typedef struct an_output an_output;

/* an_output_open: start an output.
 *   path   [in]  where it shall appear; "-" or NULL: standard output
 *   output [out] ends with an_output_commit or an_output_discard
 * Returns AN_OK, AN_E_IO naming the place, or AN_E_MEMORY. */
an_status an_output_open(const char *path, an_output **output, an_error *err);

/* an_output_stream: where to write; owned by the output. Write errors need no attention here: commit finds
 * them. */
FILE *an_output_stream(an_output *output);

/* an_output_commit: flush, sync, close and rename; *output becomes NULL. Standard output is flushed, and its
 * errors found (a full disk, a closed pipe); it stays open. Where it fails nothing stands at the place that
 * did not stand there before. Returns AN_OK or AN_E_IO. */
an_status an_output_commit(an_output **output, an_error *err);

/* an_output_discard: drop what was written; *output becomes NULL (NULL allowed). */
void an_output_discard(an_output **output);

#endif
