/* What kind a document is stands in its first element; its head is enough to tell, and whoever reads the
 * whole will judge it. Used where a program has to choose before it reads.
 */
#include "anelast/xml.h"

#include <stdio.h>
#include <string.h>

bool an_xml_sniff(const char *head, char *name, size_t n_name)
{
    for (const char *at = head; (at = strchr(at, '<')); at++) {
        const char *end = at[1] == '?' ? "?>" : strncmp(at, "<!--", 4) == 0 ? "-->" : NULL;
        if (end) {
            if (!(at = strstr(at, end)))
                return false;
            continue;
        }
        const char *colon = memchr(at, ':', strcspn(at, " \t\r\n/>"));
        const char *from = colon ? colon + 1 : at + 1;
        snprintf(name, n_name, "%.*s", (int)strcspn(from, " \t\r\n/>"), from);
        return true;
    }
    return false;
}
