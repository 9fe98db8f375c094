/* See picket/field.h. */
#include <math.h>
#include <string.h>

#include "api/border.h"
#include "api/problem_private.h"
#include "base/options.h"
#include "io/field_file.h"
#include "study/fields.h"

enum { MOST_ORDER = 199 };

static bool is_component(picket_component which) {
  return (int)which >= PICKET_COMPONENT_EX && (int)which <= PICKET_COMPONENT_HZ;
}

static picket_status prepare(picket_problem *problem, const picket_options *options,
                             picket_options *chosen, const pk_problem **understood) {
  picket_status status = pk_options_take(problem->context, options, chosen);
  return status == PICKET_OK ? pk_problem_understand(problem, understood) : status;
}

static picket_status check_question(picket_context *context, picket_polarization polarization,
                                    double wavelength_um, int order) {
  if (polarization != PICKET_EY && polarization != PICKET_HY) {
    return pk_fail(context, PICKET_ERROR_ARGUMENT,
                   "polarization is %d, must be PICKET_EY (0) or PICKET_HY (1)", (int)polarization);
  }
  if (!(wavelength_um > 0) || isinf(wavelength_um)) {
    return pk_fail(context, PICKET_ERROR_ARGUMENT,
                   "wavelength_um is %g, must be above 0 and finite", wavelength_um);
  }
  if (order < 0 || order > MOST_ORDER) {
    return pk_fail(context, PICKET_ERROR_ARGUMENT, "order is %d, must be 0 to %d", order,
                   (int)MOST_ORDER);
  }
  return PICKET_OK;
}

picket_status picket_field_find(picket_problem *problem, const picket_options *options,
                                picket_polarization polarization, double wavelength_um, int order,
                                picket_field **out) {
  if (!problem) {
    return PICKET_ERROR_ARGUMENT;
  }
  picket_context *context = problem->context;
  picket_options chosen;
  const pk_problem *understood = NULL;
  picket_status status = pk_border_enter(context);
  if (status != PICKET_OK) {
    return status;
  }
  if (!out) {
    status = pk_fail(context, PICKET_ERROR_ARGUMENT,
                     "out is null, must be the address of a field pointer");
  }
  if (status == PICKET_OK) {
    status = check_question(context, polarization, wavelength_um, order);
  }
  if (status == PICKET_OK) {
    status = prepare(problem, options, &chosen, &understood);
  }
  if (status == PICKET_OK) {
    status = pk_mode_field(understood, (pk_polarization)polarization, wavelength_um, &chosen, order,
                           out);
  }
  return pk_border_leave(context, status);
}

static const char NO_PLACE[] = "an output is null, must be the address of what is to be filled";

/* Of a field that may be null, which leaves nowhere for a message. */
static picket_status refuse(const picket_field *field, const char *why) {
  return field ? pk_border_refuse(field->context, "%s", why) : PICKET_ERROR_ARGUMENT;
}

picket_status picket_field_describe(const picket_field *field, picket_field_description *out) {
  if (!field || !out) {
    return refuse(field, NO_PLACE);
  }
  *out = field->about;
  return PICKET_OK;
}

picket_status picket_field_size(const picket_field *field, int *nz, int *nx) {
  if (!field || !nz || !nx) {
    return refuse(field, NO_PLACE);
  }
  *nz = field->nz;
  *nx = field->nx;
  return PICKET_OK;
}

picket_status picket_field_lines(const picket_field *field, picket_axis axis, double *out,
                                 size_t capacity) {
  if (!field || !out) {
    return refuse(field, NO_PLACE);
  }
  if (axis != PICKET_AXIS_Z && axis != PICKET_AXIS_X) {
    return pk_border_refuse(
        field->context, "axis is %d, must be PICKET_AXIS_Z (0) or PICKET_AXIS_X (1)", (int)axis);
  }
  size_t count = (size_t)(axis == PICKET_AXIS_Z ? field->nz : field->nx);
  if (capacity < count) {
    return pk_border_refuse(field->context, "capacity is %zu, must be at least %zu", capacity,
                            count);
  }
  memcpy(out, axis == PICKET_AXIS_Z ? field->z : field->x, count * sizeof *out);
  return PICKET_OK;
}

/* Complex numbers are pairs of doubles (C11 6.2.5); null values are zeros. */
static picket_status give(const picket_field *field, const double complex *values, double *out,
                          size_t capacity) {
  size_t count = 2 * (size_t)field->nz * (size_t)field->nx;
  if (!out) {
    return refuse(field, NO_PLACE);
  }
  if (capacity < count) {
    return pk_border_refuse(field->context, "capacity is %zu, must be at least %zu", capacity,
                            count);
  }
  if (values) {
    memcpy(out, values, count * sizeof *out);
  } else {
    memset(out, 0, count * sizeof *out);
  }
  return PICKET_OK;
}

picket_status picket_field_component(const picket_field *field, picket_component which, double *out,
                                     size_t capacity) {
  if (!field) {
    return PICKET_ERROR_ARGUMENT;
  }
  if (!is_component(which)) {
    return pk_border_refuse(field->context, "component is %d, must be %d to %d", (int)which,
                            (int)PICKET_COMPONENT_EX, (int)PICKET_COMPONENT_HZ);
  }
  return give(field, pk_mode_field_values(field, which), out, capacity);
}

picket_status picket_field_permittivity(const picket_field *field, double *out, size_t capacity) {
  return field ? give(field, field->permittivity, out, capacity) : PICKET_ERROR_ARGUMENT;
}

void picket_field_free(picket_field *field) {
  pk_mode_field_free(field);
}

/* --- The file ----------------------------------------------------------------------------------
 */

static picket_status take(void *user, const picket_field *field) {
  return pk_field_file_add(user, field);
}

static picket_status miss(void *user, pk_polarization polarization, double wavelength_um,
                          const char *why) {
  return pk_field_file_miss(user, polarization, wavelength_um, why);
}

static picket_status write_fields(const pk_problem *problem, const picket_options *options,
                                  const char *path) {
  pk_field_file *file = NULL;
  picket_status status = pk_field_file_open(problem->context, path, problem->name, false, &file);
  if (status != PICKET_OK) {
    return status;
  }
  pk_field_sink sink = {take, miss, file};
  status = pk_study_fields(problem, options, &sink);
  if (status != PICKET_OK) {
    pk_field_file_drop(file);
    return status;
  }
  return pk_field_file_finish(file);
}

picket_status picket_fields_write(picket_problem *problem, const picket_options *options,
                                  const char *path) {
  if (!problem) {
    return PICKET_ERROR_ARGUMENT;
  }
  picket_context *context = problem->context;
  picket_options chosen;
  const pk_problem *understood = NULL;
  picket_status status = pk_border_enter(context);
  if (status != PICKET_OK) {
    return status;
  }
  if (!path || path[0] == '\0') {
    status = pk_fail(context, PICKET_ERROR_ARGUMENT, "path is %s, must be a file name",
                     path ? "empty" : "null");
  }
  if (status == PICKET_OK) {
    status = prepare(problem, options, &chosen, &understood);
  }
  if (status == PICKET_OK) {
    status = write_fields(understood, &chosen, path);
  }
  return pk_border_leave(context, status);
}
