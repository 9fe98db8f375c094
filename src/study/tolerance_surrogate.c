/* The surrogate of a quantity, and what it is held against: direct solves at random samples of a
 * stream of their own, and at the samples of the yield that it puts nearest to the limit. */
#include <math.h>
#include <string.h>

#include "base/memory.h"
#include "study/tolerance_private.h"

enum { STREAM_CHECKS = 1, MOST_SCANNED = 100000 /* samples, for those nearest to the limit */ };

/* The largest error seen, times this, is what the surrogate may be off elsewhere: of a dozen checks
 * the largest error is what some one sample in ten exceeds. */
static const double SAFETY = 2;

static picket_status ask_check(pk_tolerance_study *s, const double *deviate) {
  memcpy(s->check_at[s->checks], deviate, (size_t)s->spreading->deviates * sizeof *deviate);
  picket_status status = pk_tolerance_ask(s, deviate, &s->check[s->checks]);
  s->checks += status == PICKET_OK;
  return status;
}

picket_status pk_tolerance_ask_design(pk_tolerance_study *s) {
  int axes = s->spreading->deviates, count = pk_design_count(axes);
  double deviate[PK_DEVIATES];
  picket_status status = PICKET_OK;
  s->design = PK_NEW(s->problem->context, count, int);
  if (!s->design) {
    return PICKET_ERROR_MEMORY;
  }
  for (int j = 0; j < axes; j++) {
    s->node[j] = pk_spreading_node(s->spreading, j);
  }
  for (int p = 0; p < count && status == PICKET_OK; p++) {
    pk_design_point(axes, s->node, p, deviate);
    status = pk_tolerance_ask(s, deviate, &s->design[p]);
  }
  for (int i = 0; i < PK_TOLERANCE_RANDOM && status == PICKET_OK; i++) {
    pk_spreading_draw(s->spreading, s->block->seed, STREAM_CHECKS, i, deviate);
    status = ask_check(s, deviate);
  }
  return status;
}

/* The samples nearest to the limit, the nearest first. */
static int nearest_samples(const pk_tolerance_study *s, int sample[PK_TOLERANCE_NEAR]) {
  double distance[PK_TOLERANCE_NEAR], deviate[PK_DEVIATES];
  int count = 0, scanned = s->block->samples < MOST_SCANNED ? s->block->samples : MOST_SCANNED;
  for (int n = 0; n < scanned; n++) {
    pk_spreading_draw(s->spreading, s->block->seed, 0, n, deviate);
    double off = fabs(pk_tolerance_margin(s->block, pk_quadratic_at(&s->surrogate, deviate)));
    int at = count < PK_TOLERANCE_NEAR ? count++ : PK_TOLERANCE_NEAR;
    for (; at > 0 && distance[at - 1] > off; at--) {
      if (at < PK_TOLERANCE_NEAR) {
        distance[at] = distance[at - 1];
        sample[at] = sample[at - 1];
      }
    }
    if (at < PK_TOLERANCE_NEAR) {
      distance[at] = off;
      sample[at] = n;
    }
  }
  return count;
}

picket_status pk_tolerance_fit(pk_tolerance_study *s) {
  int count = pk_design_count(s->spreading->deviates), near[PK_TOLERANCE_NEAR];
  double value[PK_DESIGN_POINTS];
  picket_status status = PICKET_OK;
  s->bar = 0;
  for (int p = 0; p < count; p++) {
    const pk_direct_answer *a = pk_tolerance_answered(s, s->design[p]);
    value[p] = a->q.value;
    s->bar = fmax(s->bar, a->q.uncertainty);
    if (!isfinite(a->q.value) || !isfinite(a->q.uncertainty)) {
      s->answer->surrogate_note = a->q.note;
      return PICKET_OK;
    }
  }
  pk_quadratic_fit(s->spreading->deviates, s->node, value, &s->surrogate);
  s->fitted = true;
  int found = nearest_samples(s, near);
  for (int i = 0; i < found && status == PICKET_OK; i++) {
    double deviate[PK_DEVIATES];
    pk_spreading_draw(s->spreading, s->block->seed, 0, near[i], deviate);
    status = ask_check(s, deviate);
  }
  return status;
}

/* A check without a value says that the surrogate cannot be trusted anywhere. */
static void hold_against(pk_tolerance_study *s, picket_tolerance_check *list) {
  double error = 0;
  for (int i = 0; i < s->checks; i++) {
    picket_quantity q = pk_tolerance_answered(s, s->check[i])->q;
    double expected = s->fitted ? pk_quadratic_at(&s->surrogate, s->check_at[i]) : NAN;
    list[i] = (picket_tolerance_check){q, expected, i >= PK_TOLERANCE_RANDOM};
    if (s->fitted && !(isfinite(q.value) && isfinite(q.uncertainty))) {
      s->fitted = false;
      s->answer->surrogate_note = q.note;
    }
    error = fmax(error, fabs(q.value - expected));
    s->bar = fmax(s->bar, q.uncertainty);
  }
  s->answer->surrogate_error = s->fitted ? error : NAN;
  s->trust = SAFETY * error;
}

picket_status pk_tolerance_take_checks(pk_tolerance_study *s) {
  int deviates = s->spreading->deviates;
  picket_tolerance_check *list = PK_NEW(s->problem->context, s->checks, picket_tolerance_check);
  picket_tolerance_deviate *deviate =
      PK_NEW(s->problem->context, deviates, picket_tolerance_deviate);
  s->answer->checks = list;
  s->answer->deviates = deviate;
  if (!list || !deviate) {
    return PICKET_ERROR_MEMORY;
  }
  s->answer->check_count = s->checks;
  hold_against(s, list);
  s->answer->deviate_count = deviates;
  for (int j = 0; j < deviates; j++) {
    deviate[j] =
        (picket_tolerance_deviate){.name = pk_result_text(s->result, s->spreading->name[j]),
                                   .normal = s->spreading->normal[j],
                                   .first = s->fitted ? s->surrogate.linear[j] : NAN,
                                   .second = s->fitted ? 2 * s->surrogate.square[j][j] : NAN};
    if (!deviate[j].name) {
      return PICKET_ERROR_MEMORY;
    }
  }
  return PICKET_OK;
}
