/* anelast/base64.h: the base64 coding of RFC 4648, section 4, strict and unwrapped, for the arrays in
 * documents. */
#ifndef ANELAST_BASE64_H
#define ANELAST_BASE64_H

#include <stdbool.h>
#include <stddef.h>

/* an_base64_size: characters that n bytes become, without a final zero byte. */
size_t an_base64_size(size_t n);

/* an_base64_encode: code bytes [n] into text [an_base64_size(n)], not terminated. */
void an_base64_encode(const void *bytes, size_t n, char *text);

/* an_base64_decode: decode text [n] into bytes [n / 4 * 3].
 *   n_bytes [out] bytes decoded
 * Returns false where the text is not whole, padded base64: foreign characters, blanks, missing padding, or
 * bits behind the last byte that are not zero. */
bool an_base64_decode(const char *text, size_t n, void *bytes, size_t *n_bytes);

#endif
