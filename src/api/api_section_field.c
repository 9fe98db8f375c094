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
  picket_status status = pk_options_take(problem->context, options, chosen);
  return status == PICKET_OK ? pk_problem_understand(problem, understood) : status;
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

/* A null field leaves nowhere for a message. */
static picket_status check(const picket_section_field *field, picket_component which, int last,
                           const void *out) {
  if (!field) {
    return PICKET_ERROR_ARGUMENT;
  }
  if ((int)which < PICKET_COMPONENT_EX || (int)which > last) {
    return pk_border_refuse(field->context, "component is %d, must be %d to %d", (int)which,
                            (int)PICKET_COMPONENT_EX, last);
  }
  return out ? PICKET_OK
             : pk_border_refuse(field->context,
                                "an output is null, must be the address of what is to be filled");
}

picket_status picket_section_field_describe(const picket_section_field *field,
                                            picket_section_field_description *out) {
  picket_status status = check(field, PICKET_COMPONENT_EX, PICKET_COMPONENT_HZ, out);
  if (status == PICKET_OK) {
    *out = field->about;
  }
  return status;
}

/* The components of the interface and of the section have the same order. */
static int count_along(const picket_section_field *field, picket_component which,
                       pk_axis_name axis) {
  return pk_whole_count(&field->whole, (pk_whole_name)which, axis);
}

picket_status picket_section_field_size(const picket_section_field *field, picket_component which,
                                        int *nx, int *ny) {
  picket_status status = check(field, which, PICKET_COMPONENT_HZ, nx ? ny : NULL);
  if (status == PICKET_OK) {
    *nx = count_along(field, which, PK_U);
    *ny = count_along(field, which, PK_V);
  }
  return status;
}

/* Copies `count` numbers if there is room for them. */
static picket_status give(const picket_section_field *field, const void *values, size_t count,
                          double *out, size_t capacity) {
  if (capacity < count) {
    return pk_border_refuse(field->context, "capacity is %zu, must be at least %zu", capacity,
                            count);
  }
  memcpy(out, values, count * sizeof *out);
  return PICKET_OK;
}

picket_status picket_section_field_places(const picket_section_field *field, picket_component which,
                                          picket_axis axis, double *out, size_t capacity) {
  picket_status status = check(field, which, PICKET_COMPONENT_HZ, out);
  if (status != PICKET_OK) {
    return status;
  }
  if (axis != PICKET_AXIS_X && axis != PICKET_AXIS_Y) {
    return pk_border_refuse(
        field->context, "axis is %d, must be PICKET_AXIS_X (1) or PICKET_AXIS_Y (2)", (int)axis);
  }
  pk_axis_name name = axis == PICKET_AXIS_X ? PK_U : PK_V;
  return give(field, pk_whole_places(&field->whole, (pk_whole_name)which, name),
              (size_t)count_along(field, which, name), out, capacity);
}

/* Complex numbers are pairs of doubles (C11 6.2.5). */
static size_t doubles_of(const picket_section_field *field, picket_component which) {
  return 2 * (size_t)count_along(field, which, PK_U) * (size_t)count_along(field, which, PK_V);
}

picket_status picket_section_field_component(const picket_section_field *field,
                                             picket_component which, double *out, size_t capacity) {
  picket_status status = check(field, which, PICKET_COMPONENT_HZ, out);
  return status == PICKET_OK
             ? give(field, field->whole.field[which], doubles_of(field, which), out, capacity)
             : status;
}

picket_status picket_section_field_permittivity(const picket_section_field *field,
                                                picket_component which, double *out,
                                                size_t capacity) {
  picket_status status = check(field, which, PK_ELECTRIC - 1, out);
  return status == PICKET_OK
             ? give(field, field->permittivity[which], doubles_of(field, which), out, capacity)
             : status;
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
