/* counts.h: binary dumps. */
#ifndef ANELAST_DUMP_COUNTS_H
#define ANELAST_DUMP_COUNTS_H

#include "anelast/dump.h"

/* an_counts_dump_read: as an_dump_read, for a layout with counts. */
an_status an_counts_dump_read(const an_dump_source *source, const an_dump_visitor *visitor,
                              an_remark_list *remarks, an_error *err);

#endif
