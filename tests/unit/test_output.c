/* Outputs that appear whole or not at all. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>

#include "anelast/output.h"

#include "scratch.h"

#include <errno.h>
#include <signal.h>
#include <sys/stat.h>
#include <sys/wait.h>

static void a_file_appears_only_when_it_is_whole(void **state)
{
    an_output *output = NULL;
    an_error err = {0};
    (void)state;
    assert_int_equal(an_output_open("new.xml", &output, &err), AN_OK);
    fputs("whole", an_output_stream(output));
    assert_int_not_equal(access("new.xml", F_OK), 0);
    assert_int_equal(an_output_commit(&output, &err), AN_OK);
    assert_null(output);
    char *text = scratch_read("new.xml");
    assert_string_equal(text, "whole");
    free(text);
    assert_int_equal(scratch_count(), 1);
    unlink("new.xml");
}

static void what_is_discarded_leaves_the_old_file(void **state)
{
    an_output *output = NULL;
    (void)state;
    scratch_write("old.xml", "old");
    assert_int_equal(an_output_open("old.xml", &output, NULL), AN_OK);
    fputs("half of the new", an_output_stream(output));
    an_output_discard(&output);
    assert_null(output);
    an_output_discard(&output);
    char *text = scratch_read("old.xml");
    assert_string_equal(text, "old");
    free(text);
    assert_int_equal(scratch_count(), 1);
    unlink("old.xml");
}

/* Killed in the middle of writing: what stood there stands there, and nothing beside it. */
static void who_is_killed_leaves_the_old_file_alone(void **state)
{
    (void)state;
    scratch_write("old.xml", "old");
    pid_t child = fork();
    if (child == 0) {
        an_output *output = NULL;
        if (an_output_open("old.xml", &output, NULL) == AN_OK) {
            fputs("half of the new", an_output_stream(output));
            fflush(an_output_stream(output));
            raise(SIGKILL);
        }
        _exit(1);
    }
    int wait_status = 0;
    assert_int_equal(waitpid(child, &wait_status, 0), child);
    assert_true(WIFSIGNALED(wait_status));
    char *text = scratch_read("old.xml");
    assert_string_equal(text, "old");
    free(text);
    assert_int_equal(scratch_count(), 1);
    unlink("old.xml");
}

static void a_replaced_file_keeps_its_mode(void **state)
{
    an_output *output = NULL;
    struct stat after;
    (void)state;
    scratch_write("kept.xml", "old");
    chmod("kept.xml", 0640);
    assert_int_equal(an_output_open("kept.xml", &output, NULL), AN_OK);
    assert_int_equal(an_output_commit(&output, NULL), AN_OK);
    assert_int_equal(stat("kept.xml", &after), 0);
    assert_int_equal(after.st_mode & 0777, 0640);
    unlink("kept.xml");
}

static void a_full_disk_is_found_at_the_end(void **state)
{
    an_output *output = NULL;
    an_error err = {0};
    (void)state;
    assert_int_equal(an_output_open("/dev/full", &output, &err), AN_OK);
    fputs("more than the disk holds", an_output_stream(output));
    assert_int_equal(an_output_commit(&output, &err), AN_E_IO);
    assert_null(output);
    assert_string_equal(err.place, "/dev/full");
    assert_non_null(strstr(err.text, strerror(ENOSPC)));
}

/* What failed long before the end, and was cleared by whoever wrote, is still found. */
static void an_early_error_is_not_forgotten(void **state)
{
    an_output *output = NULL;
    an_error err = {0};
    (void)state;
    assert_int_equal(an_output_open("/dev/full", &output, &err), AN_OK);
    for (int i = 0; i < 100000; i++)
        fputc('x', an_output_stream(output));
    clearerr(an_output_stream(output));
    fputs("a last word", an_output_stream(output));
    assert_int_equal(an_output_commit(&output, &err), AN_E_IO);
}

static void places_that_cannot_be_are_refused(void **state)
{
    an_output *output = NULL;
    an_error err = {0};
    (void)state;
    assert_int_equal(an_output_open("no-folder/new.xml", &output, &err), AN_E_IO);
    assert_null(output);
    assert_string_equal(err.place, "no-folder/new.xml");
    assert_int_equal(an_output_open(".", &output, &err), AN_E_IO);
    assert_int_equal(scratch_count(), 0);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(a_file_appears_only_when_it_is_whole),
        cmocka_unit_test(what_is_discarded_leaves_the_old_file),
        cmocka_unit_test(who_is_killed_leaves_the_old_file_alone),
        cmocka_unit_test(a_replaced_file_keeps_its_mode),
        cmocka_unit_test(a_full_disk_is_found_at_the_end),
        cmocka_unit_test(an_early_error_is_not_forgotten),
        cmocka_unit_test(places_that_cannot_be_are_refused),
    };
    return cmocka_run_group_tests(tests, scratch_enter, scratch_leave);
}
