/* stage.h: starting the stage programs, which stand beside the program that starts them.
 */
#ifndef ANELAST_STAGE_H
#define ANELAST_STAGE_H

#include "anelast/status.h"

#include <signal.h>
#include <stddef.h>

/* How a stage ended. */
typedef struct an_stage_end {
    int exit_code;   /* of the program; 128 + n where signal n ended it */
    char said[4096]; /* what it wrote to standard error, cut where there was more; no newline at its end */
} an_stage_end;

/* an_stage_folder: the folder of the running program, where its stages stand.
 *   folder [out] [n_folder]. Returns AN_OK or AN_E_IO. */
an_status an_stage_folder(char *folder, size_t n_folder, an_error *err);

/* an_stage_hold_signals: keep the signals that end a program, and that of a child's end, waiting until stages
 * look for them, so that a work folder is removed first. To be called once before the first stage. before
 * [out] the mask to restore when all is tidy: a signal that waits then ends the program as it would have */
void an_stage_hold_signals(sigset_t *before);

/* an_stage_run: run a program to its end, with nothing on standard input and standard output.
 *   folder    [in] where it stands
 *   arguments [in] ended by NULL; the first is its name
 *   end       [out] how it ended
 * Returns AN_OK where it ran, whatever it returned; AN_E_IO where it could not be started, or
 * where a signal that ends this program came: the stage was ended then. */
an_status an_stage_run(const char *folder, const char *const *arguments, an_stage_end *end, an_error *err);

/* an_stage_reason: the first line of what a stage said, without its own name in front. */
void an_stage_reason(const an_stage_end *end, char *reason, size_t n_reason);

#endif
