/* The options of a solve as the rooms see them; checked once at the border. */
#ifndef PK_BASE_OPTIONS_H
#define PK_BASE_OPTIONS_H

#include <picket/options.h>

/* PICKET_OK if every option is in its range; else PICKET_ERROR_ARGUMENT with a message. */
picket_status pk_options_check(picket_context *context, const picket_options *options);

#endif
