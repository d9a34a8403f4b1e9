/* SHA-256 by OpenSSL, as text. */
#include "anelast/hash.h"

#include <errno.h>
#include <openssl/crypto.h>
#include <openssl/evp.h>
#include <stdbool.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

struct an_sha256 {
    EVP_MD_CTX *context;
};

/* OpenSSL starts up at its first call, and does not survive one that follows a start without memory. */
static bool is_started(void)
{
    return OSSL_LIB_CTX_get0_global_default() != NULL;
}

an_sha256 *an_sha256_new(void)
{
    an_sha256 *hash = is_started() ? malloc(sizeof *hash) : NULL;
    if (!hash)
        return NULL;
    hash->context = EVP_MD_CTX_new();
    if (!hash->context || EVP_DigestInit_ex(hash->context, EVP_sha256(), NULL) != 1)
        an_sha256_free(&hash);
    return hash;
}

void an_sha256_free(an_sha256 **hash)
{
    if (!*hash)
        return;
    EVP_MD_CTX_free((*hash)->context);
    free(*hash);
    *hash = NULL;
}

an_status an_sha256_add(an_sha256 *hash, const void *bytes, size_t n)
{
    return EVP_DigestUpdate(hash->context, bytes, n) == 1 ? AN_OK : AN_E_MEMORY;
}

static void print_hex(const unsigned char *digest, char hex[AN_SHA256_SIZE])
{
    for (int i = 0; i < 32; i++)
        snprintf(hex + 2 * i, 3, "%02x", digest[i]);
}

an_status an_sha256_finish(an_sha256 *hash, char hex[AN_SHA256_SIZE])
{
    unsigned char digest[EVP_MAX_MD_SIZE];
    if (EVP_DigestFinal_ex(hash->context, digest, NULL) != 1)
        return AN_E_MEMORY;
    print_hex(digest, hex);
    return AN_OK;
}

an_status an_sha256_of(const void *bytes, size_t n, char hex[AN_SHA256_SIZE])
{
    unsigned char digest[EVP_MAX_MD_SIZE];
    if (!is_started() || EVP_Digest(bytes, n, digest, NULL, EVP_sha256(), NULL) != 1)
        return AN_E_MEMORY;
    print_hex(digest, hex);
    return AN_OK;
}

static an_status add_stream(an_sha256 *hash, FILE *stream, const char *path, an_error *err)
{
    enum { PIECE = 1 << 16 };
    char piece[PIECE];
    size_t n;
    while ((n = fread(piece, 1, sizeof piece, stream)) > 0)
        if (an_sha256_add(hash, piece, n) < 0)
            return an_fail_memory(err, "a hash");
    if (ferror(stream))
        return an_fail(err, AN_E_IO, path, "cannot be read: %s", strerror(errno));
    return AN_OK;
}

an_status an_sha256_file(const char *path, char hex[AN_SHA256_SIZE], an_error *err)
{
    an_status status = AN_OK;
    an_sha256 *hash = NULL;
    FILE *stream = fopen(path, "rb");
    if (!stream)
        return an_fail(err, AN_E_IO, path, "cannot be opened: %s", strerror(errno));
    hash = an_sha256_new();
    if (!hash) {
        status = an_fail_memory(err, "a hash");
        goto cleanup;
    }
    AN_CLEAN(add_stream(hash, stream, path, err));
    status = an_sha256_finish(hash, hex);
    if (status < 0)
        an_fail_memory(err, "a hash");
cleanup:
    an_sha256_free(&hash);
    fclose(stream);
    return status;
}
