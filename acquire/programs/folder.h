/* folder.h: a folder of results that appears whole or not at all.
 */
#ifndef ANELAST_FOLDER_H
#define ANELAST_FOLDER_H

#include "anelast/status.h"

#include <limits.h>
#include <stddef.h>

/* Names of the documents of a run, ended by NULL. */
extern const char *const an_folder_documents[];

/* A folder to work in, beside the place of its results. */
typedef struct an_work {
    char path[PATH_MAX]; /* "" where there is none */
    int lock;            /* open and locked for as long as somebody works in it; -1: none */
} an_work;

/* an_folder_begin: make the folder `into` with what leads to it, and a folder of one's own in it to work in.
 * Work folders that a killed program left there, older than ten minutes and locked by nobody, are removed.
 *   work [out] ends with an_folder_publish or an_folder_drop. Returns AN_OK or AN_E_IO. */
an_status an_folder_begin(const char *into, an_work *work, an_error *err);

/* an_folder_name: an id as the name of a folder: no slash, no blank at its ends, no dot in front, no control
 * characters. name [out] [n_name], never empty. */
void an_folder_name(const char *id, char *name, size_t n_name);

/* an_folder_publish: put the work folder in its place. What stands there is exchanged in one step; files in
 * it that are no documents of a run are kept. work [in, out] ended where nothing is left there to drop; into,
 * name [in] the place is into/name. Returns AN_OK; AN_E_IO: either the old folder still stands, or files that
 * people put there could not be moved along and are where the message says. */
an_status an_folder_publish(an_work *work, const char *into, const char *name, an_error *err);

/* an_folder_drop: remove a work folder and all in it; nothing where there is none. */
void an_folder_drop(an_work *work);

#endif
