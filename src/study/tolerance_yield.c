/* The share of samples that meet a requirement. With e what the surrogate may be off and b the bar
 * of the quantity, a sample at the distance m from the limit is judged
 *   m > e + b    by the surrogate,
 *   m + e <= b   not at all: a direct solve could not decide either; it counts by its value,
 *   else         by a direct solve; beyond the most that are allowed, by the share of those that
 *                were solved, which are a random part (two-phase sampling, J. Neyman, J. Am. Stat.
 *                Assoc. 33, 101, 1938). */
#include <math.h>

#include "base/memory.h"
#include "study/tolerance_private.h"

typedef struct count {
  double met;       /* of those not solved directly, by the surrogate */
  double undecided; /* of those */
  int near;         /* to be solved directly */
  int solved, solved_met, solved_undecided, without_value;
} count;

void pk_wilson(double share, double n, double *low, double *high) {
  const double z = 1.9599639845400545; /* 97.5 % of the normal distribution */
  double a = z * z / n, centre = share + a / 2;
  double half = z * sqrt(share * (1 - share) / n + a / (4 * n));
  *low = fmax(0, (centre - half) / (1 + a));
  *high = fmin(1, (centre + half) / (1 + a));
}

/* Draws every sample; the first near ones are asked for, task[] gets them. */
static picket_status draw_all(pk_tolerance_study *s, int *task, count *c) {
  picket_context *context = s->problem->context;
  picket_status status = PICKET_OK;
  for (int n = 0; n < s->block->samples && status == PICKET_OK; n++) {
    double deviate[PK_DEVIATES], margin = NAN;
    pk_spreading_draw(s->spreading, s->block->seed, 0, n, deviate);
    if (s->fitted) {
      margin = pk_tolerance_margin(s->block, pk_quadratic_at(&s->surrogate, deviate));
    }
    double distance = fabs(margin);
    bool sure = distance > s->trust + s->bar, hopeless = distance + s->trust <= s->bar;
    if (s->fitted && (sure || hopeless || s->block->direct == 0)) {
      c->met += margin >= 0;
      c->undecided += !sure;
    } else {
      if (c->near < s->block->direct) {
        status = pk_tolerance_ask(s, deviate, &task[c->near]);
      }
      c->near++;
    }
    if (n % 65536 == 0 && status == PICKET_OK) {
      status = pk_progress(context, "samples", (double)n / s->block->samples);
    }
  }
  return status == PICKET_OK ? pk_progress(context, "samples", 1) : status;
}

static void judge_solved(const pk_tolerance_study *s, const int *task, count *c) {
  c->solved = c->near < s->block->direct ? c->near : s->block->direct;
  for (int i = 0; i < c->solved; i++) {
    picket_quantity q = pk_tolerance_answered(s, task[i])->q;
    double margin = pk_tolerance_margin(s->block, q.value);
    if (!isfinite(q.value)) {
      c->without_value++;
    } else {
      c->solved_met += margin >= 0;
      c->solved_undecided += !(fabs(margin) > q.uncertainty);
    }
  }
}

/* Intervals of what was drawn and of what was solved of it, as independent errors. */
static void find_interval(double share, double samples, const count *c, double *low, double *high) {
  pk_wilson(share, samples, low, high);
  if (c->near > c->solved && c->solved > 0) {
    double part = c->near / samples, own = (double)c->solved_met / c->solved, own_low, own_high;
    pk_wilson(own, c->solved, &own_low, &own_high);
    *low = fmax(0, share - hypot(share - *low, part * (own - own_low)));
    *high = fmin(1, share + hypot(*high - share, part * (own_high - own)));
  }
}

static void conclude(const pk_tolerance_study *s, const count *c, picket_tolerance_yield *out) {
  double samples = s->block->samples;
  double each = c->solved > 0 ? (double)c->near / c->solved : 0; /* near samples for one solved */
  double undecided = c->undecided + each * c->solved_undecided;
  *out = (picket_tolerance_yield){.samples = s->block->samples,
                                  .seed = s->block->seed,
                                  .by_surrogate = s->block->samples - c->near,
                                  .direct = c->solved,
                                  .estimated = c->near - c->solved,
                                  .undecided = (int)lround(undecided),
                                  .without_value = c->without_value};
  if (c->near > 0 && c->solved == 0) {
    out->value = (picket_quantity){NAN, NAN, s->answer->surrogate_note};
    out->low = out->high = NAN;
    return;
  }
  double share = (c->met + each * c->solved_met) / samples;
  find_interval(share, samples, c, &out->low, &out->high);
  double bar = fmax(share - out->low, out->high - share) + undecided / samples;
  out->value = (picket_quantity){share, bar, NULL};
}

picket_status pk_tolerance_count_yield(pk_tolerance_study *s) {
  count c = {0};
  int room = s->block->direct < s->block->samples ? s->block->direct : s->block->samples;
  int *task = PK_NEW(s->problem->context, room, int);
  picket_status status = task ? draw_all(s, task, &c) : PICKET_ERROR_MEMORY;
  if (status == PICKET_OK) {
    status = pk_direct_solve(s->direct, "samples near the limit");
  }
  if (status == PICKET_OK) {
    judge_solved(s, task, &c);
    conclude(s, &c, &s->answer->yield);
  }
  pk_free(s->problem->context, task);
  return status;
}
