/* Collecting faults into one error text. Ground floor of fit; bounded by the size of an_error.text. */
#include "fit/material/fault_list.h"

#include <stdarg.h>
#include <stdbool.h>
#include <stdio.h>
#include <string.h>

static void append(an_error *err, const char *text)
{
    size_t used = strlen(err->text);
    size_t room = sizeof err->text - used;
    int written = snprintf(err->text + used, room, "%s%s", used > 0 ? "; " : "", text);
    if (written >= 0 && (size_t)written >= room)
        memcpy(err->text + sizeof err->text - 5, " ...", 5);
}

void an_fault_add(an_error *err, an_status *status, const char *format, ...)
{
    bool first = *status != AN_E_VALUE;
    *status = AN_E_VALUE;
    if (!err)
        return;
    if (first)
        *err = (an_error){.status = AN_E_VALUE};
    char text[sizeof err->text];
    va_list arguments;
    va_start(arguments, format);
    vsnprintf(text, sizeof text, format, arguments);
    va_end(arguments);
    append(err, text);
}
