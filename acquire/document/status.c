/* Errors as values: filling the caller's record, and the exit code that a status means to a shell. */
#include "anelast/status.h"

#include <stdarg.h>
#include <stdio.h>
#include <string.h>

an_status an_fail(an_error *err, an_status status, const char *place, const char *format, ...)
{
    if (!err)
        return status;
    err->status = status;
    snprintf(err->place, sizeof err->place, "%s", place ? place : "");
    va_list args;
    va_start(args, format);
    vsnprintf(err->text, sizeof err->text, format, args);
    va_end(args);
    return status;
}

an_status an_fail_memory(an_error *err, const char *wanted)
{
    return an_fail(err, AN_E_MEMORY, NULL, "no memory for %s", wanted);
}

an_status an_error_at(an_error *err, const char *place)
{
    char joined[sizeof err->place];
    if (err->place[0])
        snprintf(joined, sizeof joined, "%s: %.400s", place, err->place);
    else
        snprintf(joined, sizeof joined, "%s", place);
    memcpy(err->place, joined, sizeof joined);
    return err->status;
}

int an_exit_code(an_status status)
{
    if (status >= 0)
        return 0;
    if (status == AN_E_USAGE)
        return 2;
    return status == AN_E_IO || status == AN_E_MEMORY ? 3 : 1;
}
