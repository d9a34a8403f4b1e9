/* anelast/hash.h: SHA-256, by which documents name their inputs and signals guard their bytes. */
#ifndef ANELAST_HASH_H
#define ANELAST_HASH_H

#include "anelast/status.h"

#include <stddef.h>

/* 64 hexadecimal digits, lower case, and a final zero byte. */
enum { AN_SHA256_SIZE = 65 };

/* A hash in the making; owned by who made it. */
typedef struct an_sha256 an_sha256;

/* an_sha256_new: start a hash. Returns NULL where there is no memory. Free with an_sha256_free. */
an_sha256 *an_sha256_new(void);

/* an_sha256_free: release, also where it was never finished; *hash becomes NULL. */
void an_sha256_free(an_sha256 **hash);

/* an_sha256_add: the next n bytes. Returns AN_OK or AN_E_MEMORY. */
an_status an_sha256_add(an_sha256 *hash, const void *bytes, size_t n);

/* an_sha256_finish: the hash of all bytes added, as text; nothing can be added after it. Returns AN_OK or
 * AN_E_MEMORY. */
an_status an_sha256_finish(an_sha256 *hash, char hex[AN_SHA256_SIZE]);

/* an_sha256_of: the hash of n bytes in one call. Returns AN_OK or AN_E_MEMORY. */
an_status an_sha256_of(const void *bytes, size_t n, char hex[AN_SHA256_SIZE]);

/* an_sha256_file: the hash of a file's bytes, read in pieces. Returns AN_OK, AN_E_IO or AN_E_MEMORY. */
an_status an_sha256_file(const char *path, char hex[AN_SHA256_SIZE], an_error *err);

#endif
