/* The options of a solve as the rooms see them; checked once at the border. */
#ifndef PK_BASE_OPTIONS_H
#define PK_BASE_OPTIONS_H

#include <picket/options.h>

/* The caller's options, or the defaults for null; those of a smaller struct are filled up.
 * PICKET_ERROR_ARGUMENT with a message if one is out of its range; `chosen` is then undefined. */
picket_status pk_options_take(picket_context *context, const picket_options *options,
                              picket_options *chosen);

#endif
