/* See options.h and options.def. Every option is a double in the public struct, so that one table
 * of offsets serves setting, checking and describing. */
#include "base/options.h"

#include <math.h>
#include <string.h>

#include "base/context.h"
#include "base/stamp.h"

#define PK_OPTION(name, usual, least, most, whole, help) {#name, usual, least, most, whole, help},
static const picket_option_description DESCRIPTION[] = {
#include "base/options.def"
};
#undef PK_OPTION

#define PK_OPTION(name, usual, least, most, whole, help) offsetof(picket_options, name),
static const size_t OFFSET[] = {
#include "base/options.def"
};
#undef PK_OPTION

enum { OPTIONS = sizeof OFFSET / sizeof OFFSET[0] };

static double *member(picket_options *options, int i) {
  return (double *)((char *)options + OFFSET[i]);
}

static double value_of(const picket_options *options, int i) {
  return *(const double *)((const char *)options + OFFSET[i]);
}

static int allowed(int i, double value) {
  const picket_option_description *d = &DESCRIPTION[i];
  return value >= d->least && value <= d->most && (!d->whole || value == floor(value));
}

void picket_options_init_sized(picket_options *options, size_t size) {
  picket_options usual = {0};
  for (int i = 0; i < OPTIONS; i++) {
    *member(&usual, i) = DESCRIPTION[i].usual;
  }
  pk_stamp_give(&usual, sizeof usual, options, size);
}

/* In parentheses because the header has a macro of the same name. */
void(picket_options_init)(picket_options *options) {
  picket_options_init_sized(options, sizeof *options);
}

const picket_option_description *picket_option_at(int i) {
  return i >= 0 && i < OPTIONS ? &DESCRIPTION[i] : NULL;
}

static picket_status refuse(picket_context *context, int i, double value) {
  const picket_option_description *d = &DESCRIPTION[i];
  return pk_fail(context, PICKET_ERROR_ARGUMENT, "%s is %g, must be %g to %g%s", d->name, value,
                 d->least, d->most, d->whole ? ", a whole number" : "");
}

/* The option of a name that a struct of so many bytes has; -1 if there is none. */
static int find(const char *name, size_t bytes) {
  int i = 0;
  while (i < OPTIONS && strcmp(name, DESCRIPTION[i].name) != 0) {
    i++;
  }
  return i < OPTIONS && OFFSET[i] + sizeof(double) <= bytes ? i : -1;
}

picket_status picket_options_set(picket_options *options, const char *name, double value) {
  if (!options || !name || !pk_stamp_fits(options->size, sizeof *options)) {
    return PICKET_ERROR_ARGUMENT;
  }
  int i = find(name, options->size);
  if (i < 0 || !allowed(i, value)) {
    return PICKET_ERROR_ARGUMENT;
  }
  *member(options, i) = value;
  return PICKET_OK;
}

static picket_status choose(picket_context *context, picket_options *options, const char *name,
                            double value) {
  if (!options || !name) {
    return pk_fail(context, PICKET_ERROR_ARGUMENT, "%s is null", options ? "name" : "options");
  }
  picket_options copy = {0};
  picket_status status = pk_stamp_take(context, "picket_options", options, &copy, sizeof copy);
  if (status != PICKET_OK) {
    return status;
  }
  int i = find(name, options->size);
  if (i < 0) {
    return pk_fail(context, PICKET_ERROR_ARGUMENT,
                   "there is no option \"%.40s\", see picket_option_at", name);
  }
  if (!allowed(i, value)) {
    return refuse(context, i, value);
  }
  *member(options, i) = value;
  return PICKET_OK;
}

picket_status picket_options_choose(picket_context *context, picket_options *options,
                                    const char *name, double value) {
  if (!context) {
    return PICKET_ERROR_ARGUMENT;
  }
  if (!pk_context_enter(context)) {
    return PICKET_ERROR_BUSY;
  }
  pk_message_clear(context);
  picket_status status = choose(context, options, name, value);
  pk_context_leave(context);
  return status;
}

picket_status pk_options_take(picket_context *context, const picket_options *options,
                              picket_options *chosen) {
  picket_options_init(chosen);
  picket_status status =
      options ? pk_stamp_take(context, "picket_options", options, chosen, sizeof *chosen)
              : PICKET_OK;
  for (int i = 0; status == PICKET_OK && i < OPTIONS; i++) {
    if (!allowed(i, value_of(chosen, i))) {
      status = refuse(context, i, value_of(chosen, i));
    }
  }
  return status;
}
