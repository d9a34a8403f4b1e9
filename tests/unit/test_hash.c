/* SHA-256 and base64 against the examples of their standards. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>

#include "anelast/base64.h"
#include "anelast/hash.h"

#include "scratch.h"

/* FIPS 180-4, the examples published with it: "abc", the two-block message, and the empty one (from memory).
 */
static void sha256_gives_the_standards_examples(void **state)
{
    static const struct {
        const char *message, *hash;
    } rows[] = {
        {"abc", "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad"},
        {"abcdbcdecdefdefgefghfghighijhijkijkljklmklmnlmnomnopnopq",
         "248d6a61d20638b8e5c026930c3e6039a33ce45964ff2167f6ecedd419db06c1"},
        {"", "e3b0c44298fc1c149afbf4c8996fb92427ae41e4649b934ca495991b7852b855"},
    };
    char hex[AN_SHA256_SIZE];
    (void)state;
    for (size_t i = 0; i < sizeof rows / sizeof rows[0]; i++) {
        assert_int_equal(an_sha256_of(rows[i].message, strlen(rows[i].message), hex), AN_OK);
        assert_string_equal(hex, rows[i].hash);
        scratch_write("message", rows[i].message);
        assert_int_equal(an_sha256_file("message", hex, NULL), AN_OK);
        assert_string_equal(hex, rows[i].hash);
    }
}

/* FIPS 180-4: a million times "a", added in uneven pieces. */
static void sha256_adds_up_pieces(void **state)
{
    char piece[997], hex[AN_SHA256_SIZE];
    an_sha256 *hash = an_sha256_new();
    (void)state;
    memset(piece, 'a', sizeof piece);
    for (size_t left = 1000000; left > 0;) {
        size_t n = left < sizeof piece ? left : sizeof piece;
        assert_int_equal(an_sha256_add(hash, piece, n), AN_OK);
        left -= n;
    }
    assert_int_equal(an_sha256_finish(hash, hex), AN_OK);
    assert_string_equal(hex, "cdc76e5c9914fb9281a1c7e284d73e67f1809a48a497200e046d39ccc7112cd0");
    an_sha256_free(&hash);
    assert_null(hash);
}

static void a_missing_file_is_refused_by_name(void **state)
{
    char hex[AN_SHA256_SIZE];
    an_error err = {0};
    (void)state;
    assert_int_equal(an_sha256_file("nowhere.txt", hex, &err), AN_E_IO);
    assert_string_equal(err.place, "nowhere.txt");
    assert_int_equal(an_sha256_file("/", hex, &err), AN_E_IO);
}

/* RFC 4648, section 10. */
static void base64_gives_the_standards_examples(void **state)
{
    static const char *const rows[][2] = {{"", ""},
                                          {"f", "Zg=="},
                                          {"fo", "Zm8="},
                                          {"foo", "Zm9v"},
                                          {"foob", "Zm9vYg=="},
                                          {"fooba", "Zm9vYmE="},
                                          {"foobar", "Zm9vYmFy"}};
    (void)state;
    for (size_t i = 0; i < 7; i++) {
        char text[16] = "", bytes[16] = "";
        size_t n = 0, n_bytes = strlen(rows[i][0]), n_text = strlen(rows[i][1]);
        assert_int_equal(an_base64_size(n_bytes), n_text);
        an_base64_encode(rows[i][0], n_bytes, text);
        assert_string_equal(text, rows[i][1]);
        assert_true(an_base64_decode(text, n_text, bytes, &n));
        assert_int_equal(n, n_bytes);
        assert_memory_equal(bytes, rows[i][0], n);
    }
}

static void base64_comes_back_for_every_byte_and_length(void **state)
{
    unsigned char bytes[256], back[258];
    char text[400];
    (void)state;
    for (int i = 0; i < 256; i++)
        bytes[i] = (unsigned char)(i * 167 + 13);
    for (size_t n = 0; n <= 256; n++) {
        size_t n_back = 0;
        an_base64_encode(bytes, n, text);
        assert_true(an_base64_decode(text, an_base64_size(n), back, &n_back));
        assert_int_equal(n_back, n);
        assert_memory_equal(back, bytes, n);
    }
}

static void base64_that_is_not_strict_is_refused(void **state)
{
    static const char *const texts[] = {
        "Zg=",  "Zg",     "Z===",     "====", "Zg==Zg==",         "Zm9\n", "Zm 9", "Zh==",
        "Zm9=", "Zm9v\n", "Zm9v====", "Z-9v", "\xff\xff\xff\xff", "=g=="};
    char bytes[16];
    size_t n;
    (void)state;
    for (size_t i = 0; i < sizeof texts / sizeof texts[0]; i++)
        if (an_base64_decode(texts[i], strlen(texts[i]), bytes, &n))
            fail_msg("'%s' was taken", texts[i]);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(sha256_gives_the_standards_examples),
        cmocka_unit_test(sha256_adds_up_pieces),
        cmocka_unit_test(a_missing_file_is_refused_by_name),
        cmocka_unit_test(base64_gives_the_standards_examples),
        cmocka_unit_test(base64_comes_back_for_every_byte_and_length),
        cmocka_unit_test(base64_that_is_not_strict_is_refused),
    };
    return cmocka_run_group_tests(tests, scratch_enter, scratch_leave);
}
