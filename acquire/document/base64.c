/* Base64 of RFC 4648, section 4, by tables: three bytes to four characters and back. */
#include "anelast/base64.h"

#include <stdint.h>

static const char letters[64] = "ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz0123456789+/";

/* 0..63 for a letter of the alphabet, 0x80 for anything else. */
enum { FOREIGN = 0x80 };

static void make_values(uint8_t values[256])
{
    for (int i = 0; i < 256; i++)
        values[i] = FOREIGN;
    for (int i = 0; i < 64; i++)
        values[(uint8_t)letters[i]] = (uint8_t)i;
}

size_t an_base64_size(size_t n)
{
    return (n + 2) / 3 * 4;
}

void an_base64_encode(const void *bytes, size_t n, char *text)
{
    const uint8_t *b = bytes;
    for (; n >= 3; n -= 3, b += 3) {
        *text++ = letters[b[0] >> 2];
        *text++ = letters[(b[0] & 3) << 4 | b[1] >> 4];
        *text++ = letters[(b[1] & 15) << 2 | b[2] >> 6];
        *text++ = letters[b[2] & 63];
    }
    if (!n)
        return;
    uint8_t second = n == 2 ? b[1] : 0;
    *text++ = letters[b[0] >> 2];
    *text++ = letters[(b[0] & 3) << 4 | second >> 4];
    *text++ = n == 2 ? letters[(second & 15) << 2] : '=';
    *text = '=';
}

/* The last four characters, which may be padded; returns the number of bytes, 0 where they are not right. */
static size_t decode_last(const uint8_t values[256], const uint8_t *s, uint8_t *b)
{
    uint8_t v[4];
    size_t n_pad = s[3] != '=' ? 0 : s[2] != '=' ? 1 : 2;
    for (size_t i = 0; i < 4; i++)
        v[i] = i < 4 - n_pad ? values[s[i]] : 0;
    if ((v[0] | v[1] | v[2] | v[3]) & FOREIGN)
        return 0;
    if ((n_pad == 1 && v[2] & 3) || (n_pad == 2 && v[1] & 15))
        return 0;
    const uint8_t whole[3] = {(uint8_t)(v[0] << 2 | v[1] >> 4), (uint8_t)(v[1] << 4 | v[2] >> 2),
                              (uint8_t)(v[2] << 6 | v[3])};
    for (size_t i = 0; i < 3 - n_pad; i++)
        b[i] = whole[i];
    return 3 - n_pad;
}

bool an_base64_decode(const char *text, size_t n, void *bytes, size_t *n_bytes)
{
    uint8_t values[256];
    const uint8_t *s = (const uint8_t *)text;
    uint8_t *b = bytes;
    *n_bytes = 0;
    if (n % 4 != 0)
        return false;
    if (n == 0)
        return true;
    make_values(values);
    uint8_t foreign = 0;
    for (; n > 4; n -= 4, s += 4, b += 3) {
        uint8_t v0 = values[s[0]], v1 = values[s[1]], v2 = values[s[2]], v3 = values[s[3]];
        foreign |= v0 | v1 | v2 | v3;
        b[0] = (uint8_t)(v0 << 2 | v1 >> 4);
        b[1] = (uint8_t)(v1 << 4 | v2 >> 2);
        b[2] = (uint8_t)(v2 << 6 | v3);
    }
    size_t n_last = decode_last(values, s, b);
    if (foreign & FOREIGN || n_last == 0)
        return false;
    *n_bytes = (size_t)(b - (uint8_t *)bytes) + n_last;
    return true;
}
