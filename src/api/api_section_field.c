/* See picket/section_field.h. */
#include <math.h>
#include <string.h>

#include "api/border.h"
#include "api/problem_private.h"
#include "base/options.h"
#include "io/field_file.h"
#include "study/section_field.h"

enum { MOST_ORDER = 199 };

static picket_status prepare(picket_problem *problem, const picket_options *options,
                             picket_options *chosen, const pk_problem **understood) {
  picket_status status = options ? pk_options_check(problem->context, options) : PICKET_OK;
  if (status != PICKET_OK) {
    return status;
  }
  picket_options_init(chosen);
  *chosen = options ? *options : *chosen;
  return pk_problem_understand(problem, understood);
}

static picket_status check_question(picket_context *context, double wavelength_um, int order,
                                    picket_section_field **out) {
  if (!out) {
    return pk_fail(context, PICKET_ERROR_ARGUMENT,
                   "out is null, must be the address of a field pointer");
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

picket_status picket_section_field_find(picket_problem *problem, const picket_options *options,
                                        double wavelength_um, int order,
                                        picket_section_field **out) {
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
  status = check_question(context, wavelength_um, order, out);
  if (status == PICKET_OK) {
    status = prepare(problem, options, &chosen, &understood);
  }
  if (status == PICKET_OK) {
    status = pk_section_field(understood, wavelength_um, &chosen, order, out);
  }
  return pk_border_leave(context, status);
}

picket_status picket_section_field_describe(const picket_section_field *field,
                                            picket_section_field_description *out) {
  if (!field || !out) {
    return PICKET_ERROR_ARGUMENT;
  }
  *out = field->about;
  return PICKET_OK;
}

/* The components of the interface and of the section have the same order. */
static bool is_component(const picket_section_field *field, picket_component which) {
  return field && (int)which >= PICKET_COMPONENT_EX && (int)which <= PICKET_COMPONENT_HZ;
}

picket_status picket_section_field_size(const picket_section_field *field, picket_component which,
                                        int *nx, int *ny) {
  if (!is_component(field, which) || !nx || !ny) {
    return PICKET_ERROR_ARGUMENT;
  }
  *nx = pk_whole_count(&field->whole, (pk_whole_name)which, PK_U);
  *ny = pk_whole_count(&field->whole, (pk_whole_name)which, PK_V);
  return PICKET_OK;
}

picket_status picket_section_field_places(const picket_section_field *field, picket_component which,
                                          picket_axis axis, double *out, size_t capacity) {
  if (!is_component(field, which) || !out || (axis != PICKET_AXIS_X && axis != PICKET_AXIS_Y)) {
    return PICKET_ERROR_ARGUMENT;
  }
  pk_axis_name name = axis == PICKET_AXIS_X ? PK_U : PK_V;
  size_t count = (size_t)pk_whole_count(&field->whole, (pk_whole_name)which, name);
  if (capacity < count) {
    return PICKET_ERROR_ARGUMENT;
  }
  memcpy(out, pk_whole_places(&field->whole, (pk_whole_name)which, name), count * sizeof *out);
  return PICKET_OK;
}

/* Complex numbers are pairs of doubles (C11 6.2.5). */
static picket_status give(const picket_section_field *field, picket_component which,
                          const double complex *values, double *out, size_t capacity) {
  int nx = 0, ny = 0;
  picket_status status = picket_section_field_size(field, which, &nx, &ny);
  size_t count = 2 * (size_t)nx * (size_t)ny;
  if (status != PICKET_OK || !out || capacity < count) {
    return PICKET_ERROR_ARGUMENT;
  }
  memcpy(out, values, count * sizeof *out);
  return PICKET_OK;
}

picket_status picket_section_field_component(const picket_section_field *field,
                                             picket_component which, double *out, size_t capacity) {
  return is_component(field, which) ? give(field, which, field->whole.field[which], out, capacity)
                                    : PICKET_ERROR_ARGUMENT;
}

picket_status picket_section_field_permittivity(const picket_section_field *field,
                                                picket_component which, double *out,
                                                size_t capacity) {
  return is_component(field, which) && (int)which < PK_ELECTRIC
             ? give(field, which, field->permittivity[which], out, capacity)
             : PICKET_ERROR_ARGUMENT;
}

void picket_section_field_free(picket_section_field *field) {
  pk_section_field_free(field);
}

/* --- The file ----------------------------------------------------------------------------------
 */

static picket_status take(void *user, const picket_section_field *field) {
  return pk_field_file_add_section(user, field);
}

static picket_status miss(void *user, double wavelength_um, const char *why) {
  return pk_field_file_miss_section(user, wavelength_um, why);
}

static picket_status write_fields(const pk_problem *problem, const picket_options *options,
                                  const char *path) {
  pk_field_file *file = NULL;
  picket_status status = pk_field_file_open(problem->context, path, problem->name, true, &file);
  if (status != PICKET_OK) {
    return status;
  }
  pk_section_sink sink = {take, miss, file};
  status = pk_study_section_fields(problem, options, &sink);
  if (status != PICKET_OK) {
    pk_field_file_drop(file);
    return status;
  }
  return pk_field_file_finish(file);
}

picket_status picket_section_fields_write(picket_problem *problem, const picket_options *options,
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
