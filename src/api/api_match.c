/* See picket/match.h. */
#include <math.h>
#include <stddef.h>
#include <string.h>

#include "api/border.h"
#include "api/problem_private.h"
#include "base/stamp.h"
#include "study/study.h"

/* Ranges of a request. */
static const double MOST_UM = 1000;
static const double MOST_TILT = 0.5235987755982989; /* π/6 */
static const double MOST_TILT_DEG = 30;
static const double DEG = 57.29577951308232;
static const double LEAST_INDEX = 1, MOST_INDEX = 10;
enum { MOST_ORDER = 199 };

void picket_match_request_init_sized(picket_match_request *request, size_t size) {
  const picket_match_request usual = {.mode_b = -1};
  pk_stamp_give(&usual, sizeof usual, request, size);
}

/* In parentheses because the header has a macro of the same name. */
void(picket_match_request_init)(picket_match_request *request) {
  picket_match_request_init_sized(request, sizeof *request);
}

static picket_status check_within(picket_context *context, const char *name, double value,
                                  double most, const char *unit) {
  return value >= -most && value <= most
             ? PICKET_OK
             : pk_fail(context, PICKET_ERROR_ARGUMENT, "match: %s is %g %s, must be %g to %g", name,
                       value, unit, -most, most);
}

static picket_status check_diameter(picket_context *context, const char *name, double value) {
  return value > 0 && value <= MOST_UM
             ? PICKET_OK
             : pk_fail(context, PICKET_ERROR_ARGUMENT,
                       "match: the beam's diameter along %s is %g um, must be above 0 and at most "
                       "%g um",
                       name, value, MOST_UM);
}

static picket_status check_beam(picket_context *context, const picket_match_request *r) {
  picket_status status = check_diameter(context, "x", r->gaussian_x_um);
  if (status == PICKET_OK) {
    status = check_diameter(context, "y", r->gaussian_y_um);
  }
  if (status == PICKET_OK &&
      (r->along < PICKET_MATCH_ALONG_BEST || r->along > PICKET_MATCH_ALONG_Y)) {
    status = pk_fail(context, PICKET_ERROR_ARGUMENT, "match: along is %d, must be 0 to 2",
                     (int)r->along);
  }
  bool usual = r->medium_index == 0;
  if (status == PICKET_OK && !usual &&
      !(r->medium_index >= LEAST_INDEX && r->medium_index <= MOST_INDEX)) {
    status = pk_fail(context, PICKET_ERROR_ARGUMENT,
                     "match: the index of the beam's medium is %g, must be %g to %g",
                     r->medium_index, LEAST_INDEX, MOST_INDEX);
  }
  return status;
}

static picket_status check_orders(picket_context *context, const picket_match_request *r) {
  if (r->mode < 0 || r->mode > MOST_ORDER) {
    return pk_fail(context, PICKET_ERROR_ARGUMENT, "match: mode is %d, must be 0 to %d", r->mode,
                   MOST_ORDER);
  }
  if (r->mode_b < -1 || r->mode_b > MOST_ORDER) {
    return pk_fail(context, PICKET_ERROR_ARGUMENT, "match: mode_b is %d, must be -1 to %d",
                   r->mode_b, MOST_ORDER);
  }
  return PICKET_OK;
}

static picket_status check_places(picket_context *context, const picket_match_request *r) {
  picket_status status = check_within(context, "the offset along x", r->offset_x_um, MOST_UM, "um");
  if (status == PICKET_OK) {
    status = check_within(context, "the offset along y", r->offset_y_um, MOST_UM, "um");
  }
  if (status == PICKET_OK &&
      !(fabs(r->tilt_x_rad) <= MOST_TILT && fabs(r->tilt_y_rad) <= MOST_TILT)) {
    status = check_within(context, "the tilt along x", DEG * r->tilt_x_rad, MOST_TILT_DEG, "deg");
    if (status == PICKET_OK) {
      status = check_within(context, "the tilt along y", DEG * r->tilt_y_rad, MOST_TILT_DEG, "deg");
    }
  }
  return status;
}

static picket_status check_request(const picket_problem *problem, const picket_problem *other,
                                   const picket_match_request *r) {
  picket_context *context = problem->context;
  bool beam = r->gaussian_x_um != 0 || r->gaussian_y_um != 0;
  if (beam == (other != NULL)) {
    return pk_fail(context, PICKET_ERROR_ARGUMENT,
                   "match: %s, must be either a second problem or a beam",
                   beam ? "both a second problem and a beam are given"
                        : "neither a second problem nor a beam is given");
  }
  if (other && other->context != context) {
    return pk_fail(context, PICKET_ERROR_ARGUMENT,
                   "match: the second problem is of another context, must be of the same");
  }
  picket_status status = check_orders(context, r);
  if (status == PICKET_OK && beam) {
    status = check_beam(context, r);
  }
  return status == PICKET_OK ? check_places(context, r) : status;
}

static picket_status find(picket_problem *problem, picket_problem *other,
                          const picket_match_request *given, const picket_options *options,
                          picket_result **out) {
  picket_options chosen;
  picket_match_request request;
  const pk_problem *first = NULL, *second = NULL;
  picket_match_request_init(&request);
  picket_status status = given ? pk_stamp_take(problem->context, "picket_match_request", given,
                                               &request, sizeof request)
                               : PICKET_OK;
  if (status == PICKET_OK) {
    status = check_request(problem, other, &request);
  }
  if (status == PICKET_OK) {
    status = pk_border_prepare(problem, options, out, &chosen, &first);
  }
  if (status == PICKET_OK && other) {
    status = pk_problem_understand(other, &second);
  }
  return status == PICKET_OK ? pk_study_match(first, second, &request, &chosen, out) : status;
}

picket_status picket_match_find(picket_problem *problem, picket_problem *other,
                                const picket_match_request *request, const picket_options *options,
                                picket_result **out) {
  if (!problem) {
    return PICKET_ERROR_ARGUMENT;
  }
  picket_status status = pk_border_enter(problem->context);
  if (status != PICKET_OK) {
    return status;
  }
  status = find(problem, other, request, options, out);
  return pk_border_leave(problem->context, status);
}

int picket_match_count(const picket_result *result) {
  return pk_border_count(result, PK_RESULT_MATCH);
}

picket_status picket_match_get(const picket_result *result, int i, picket_match_answer *out) {
  picket_status status = pk_border_answer(result, PK_RESULT_MATCH, i, out);
  if (status == PICKET_OK) {
    *out = result->match[i];
  }
  return status;
}
