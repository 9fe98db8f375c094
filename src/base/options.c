/* See options.h and options.def. Every option is a double in the public struct, so that one table
 * of offsets serves setting, checking and describing. */
#include "base/options.h"

#include <math.h>
#include <string.h>

#include "base/context.h"

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

void picket_options_init(picket_options *options) {
  if (!options) {
    return;
  }
  memset(options, 0, sizeof *options);
  options->size = sizeof *options;
  for (int i = 0; i < OPTIONS; i++) {
    *member(options, i) = DESCRIPTION[i].usual;
  }
}

const picket_option_description *picket_option_at(int i) {
  return i >= 0 && i < OPTIONS ? &DESCRIPTION[i] : NULL;
}

picket_status picket_options_set(picket_options *options, const char *name, double value) {
  for (int i = 0; options && name && i < OPTIONS; i++) {
    if (strcmp(name, DESCRIPTION[i].name) == 0 && allowed(i, value)) {
      *member(options, i) = value;
      return PICKET_OK;
    }
  }
  return PICKET_ERROR_ARGUMENT;
}

picket_status pk_options_check(picket_context *context, const picket_options *options) {
  if (options->size != sizeof *options) {
    return pk_fail(context, PICKET_ERROR_ARGUMENT,
                   "options: size is %zu, must be %zu: call picket_options_init", options->size,
                   sizeof *options);
  }
  for (int i = 0; i < OPTIONS; i++) {
    if (!allowed(i, value_of(options, i))) {
      return pk_fail(context, PICKET_ERROR_ARGUMENT, "%s is %g, must be %g to %g%s",
                     DESCRIPTION[i].name, value_of(options, i), DESCRIPTION[i].least,
                     DESCRIPTION[i].most, DESCRIPTION[i].whole ? ", a whole number" : "");
    }
  }
  return PICKET_OK;
}
