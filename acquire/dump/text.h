/* text.h: text dumps, row by row. */
#ifndef ANELAST_DUMP_TEXT_H
#define ANELAST_DUMP_TEXT_H

#include "anelast/dump.h"

/* an_text_dump_read: as an_dump_read, for a layout with a text. */
an_status an_text_dump_read(const an_dump_source *source, const an_dump_visitor *visitor,
                            an_remark_list *remarks, an_error *err);

#endif
