/* Two numbers for two targets: f(x) = t with x and t in the plane. See aim_private.h.
 *
 * Newton's method with C. G. Broyden's update of the derivatives (Math. Comp. 19, 577 (1965)):
 *   x ← x - J⁻¹ r,   J ← J + (r_new - r_old - J Δx) Δxᵀ/|Δx|²,
 * in units of the widths of the bounds and of the sizes of the quantities. A step ends before it
 * leaves the bounds, and is halved while it makes matters worse. */
#include <math.h>
#include <string.h>

#include "study/aim_private.h"

enum {
  MOST_STEPS = 14,
  MOST_HALVINGS = 4 /* a step of a sixteenth that still makes matters worse is a wrong direction */
};

/* Of the width: the step of a difference where a derivative is not analytic. */
static const double STEP = 0.02;

/* Part of the way to a bound that one step goes. */
static const double TO_BOUND = 0.9;

typedef struct state {
  double x[2]; /* 0 to 1 between the bounds */
  pk_measurement m[2];
  double r[2]; /* (f - t) over the scale */
  bool good;
} state;

static double worst_of(const state *a) {
  return hypot(a->r[0], a->r[1]);
}

static void to_values(const pk_aim_search *s, const double x[2], double values[2]) {
  for (int i = 0; i < 2; i++) {
    values[i] = s->part[i].from + x[i] * (s->part[i].to - s->part[i].from);
  }
}

static picket_status measure_at(pk_aim_search *s, const double x[2], state *out) {
  double values[2];
  to_values(s, x, values);
  *out = (state){.x = {x[0], x[1]}, .good = true};
  picket_status status = PICKET_OK;
  for (int k = 0; k < 2 && status == PICKET_OK && out->good; k++) {
    status = pk_aim_measure(s, k, values, s->options->accuracy, &out->m[k]);
    out->good = isfinite(out->m[k].q.value);
    out->r[k] = (out->m[k].q.value - s->part[k].target) / out->m[k].scale;
  }
  return status;
}

static bool is_met(const pk_aim_search *s, const state *a) {
  bool met = a->good;
  for (int k = 0; k < 2; k++) {
    met = met && fabs(a->m[k].q.value - s->part[k].target) <= pk_aim_tolerance(s, &a->m[k]);
  }
  return met;
}

/* Column i of J where it is not analytic: a difference, towards the farther bound. */
static picket_status difference(pk_aim_search *s, const state *at, int i, const bool known[2],
                                double jacobian[2][2], bool *good) {
  double x[2] = {at->x[0], at->x[1]}, values[2];
  double step = x[i] > 0.5 ? -STEP : STEP;
  x[i] += step;
  to_values(s, x, values);
  for (int k = 0; k < 2 && *good; k++) {
    if (known[k]) {
      continue;
    }
    pk_measurement m;
    picket_status status = pk_aim_measure(s, k, values, s->options->accuracy, &m);
    if (status != PICKET_OK) {
      return status;
    }
    *good = isfinite(m.q.value);
    jacobian[k][i] = (m.q.value - at->m[k].q.value) / step / at->m[k].scale;
  }
  return PICKET_OK;
}

static picket_status derivatives(pk_aim_search *s, const state *at, double jacobian[2][2],
                                 bool analytic[2][2], bool *good) {
  double values[2];
  *good = true;
  to_values(s, at->x, values);
  for (int i = 0; i < 2 && *good; i++) {
    bool known[2] = {false, false};
    for (int k = 0; k < 2; k++) {
      pk_measured_slope slope;
      if (!pk_measured_has_slope(s->question[k].what, s->question[k].structure)) {
        continue;
      }
      picket_status status =
          pk_measure_slope_analytic(s->variants, values, i, &s->question[k], s->options, &slope);
      if (status != PICKET_OK) {
        return status;
      }
      s->passes++;
      known[k] = isfinite(slope.q.value);
      jacobian[k][i] = slope.q.value * (s->part[i].to - s->part[i].from) / at->m[k].scale;
    }
    analytic[0][i] = known[0];
    analytic[1][i] = known[1];
    picket_status status = difference(s, at, i, known, jacobian, good);
    if (status != PICKET_OK) {
      return status;
    }
  }
  return PICKET_OK;
}

/* J⁻¹ r; false if J is singular. */
static bool solve(const double j[2][2], const double r[2], double out[2]) {
  double det = j[0][0] * j[1][1] - j[0][1] * j[1][0];
  out[0] = (j[1][1] * r[0] - j[0][1] * r[1]) / det;
  out[1] = (j[0][0] * r[1] - j[1][0] * r[0]) / det;
  return isfinite(out[0]) && isfinite(out[1]);
}

/* The part of a step that stays between the bounds. */
static double allowed(const double x[2], const double step[2]) {
  double part = 1;
  for (int i = 0; i < 2; i++) {
    double room = step[i] > 0 ? 1 - x[i] : x[i];
    if (fabs(step[i]) > room) { /* onto the bound if it is all but there */
      part = fmin(part, TO_BOUND * room / fabs(step[i]));
    }
  }
  return part;
}

static void update(double j[2][2], const state *before, const state *after) {
  double d[2] = {after->x[0] - before->x[0], after->x[1] - before->x[1]};
  double length = d[0] * d[0] + d[1] * d[1];
  for (int k = 0; k < 2; k++) {
    double off = after->r[k] - before->r[k] - j[k][0] * d[0] - j[k][1] * d[1];
    j[k][0] += off * d[0] / length;
    j[k][1] += off * d[1] / length;
  }
}

/* One step; *moved is false where none makes matters better. */
static picket_status take_step(pk_aim_search *s, state *at, double j[2][2], bool *moved) {
  double newton[2];
  *moved = false;
  if (!solve((const double(*)[2])j, at->r, newton)) {
    return PICKET_OK;
  }
  double step[2] = {-newton[0], -newton[1]}, part = allowed(at->x, step);
  for (int h = 0; h < MOST_HALVINGS && !*moved; h++, part /= 2) {
    state next;
    double x[2] = {at->x[0] + part * step[0], at->x[1] + part * step[1]};
    picket_status status = measure_at(s, x, &next);
    if (status != PICKET_OK) {
      return status;
    }
    if (next.good) {
      update(j, at, &next);
      *moved = worst_of(&next) < worst_of(at) || is_met(s, &next);
    }
    *at = *moved ? next : *at;
  }
  return PICKET_OK;
}

static picket_status fill(pk_aim_search *s, const state *at, const double j[2][2],
                          const bool analytic[2][2]) {
  double values[2], bar[2] = {0, 0};
  to_values(s, at->x, values);
  for (int k = 0; k < 2; k++) { /* what is unknown of each target moves both numbers */
    double r[2] = {0, 0}, moves[2];
    r[k] = (at->m[k].q.uncertainty + fabs(at->m[k].q.value - s->part[k].target)) / at->m[k].scale;
    bool good = solve(j, r, moves);
    for (int i = 0; i < 2; i++) {
      bar[i] += good ? fabs(moves[i]) : NAN;
    }
  }
  picket_status status = PICKET_OK;
  for (int i = 0; i < 2 && status == PICKET_OK; i++) {
    picket_aim_part *part = &s->part[i];
    double width = part->to - part->from;
    status = pk_aim_quantity(s, &at->m[i], &part->achieved);
    s->reached[i] = at->m[i].reached;
    part->value = (picket_quantity){values[i], bar[i] * width, NULL};
    part->value.note = isnan(bar[i]) ? "the bar of a quantity is missing" : NULL;
    part->derivative = (picket_quantity){
        j[i][i] * at->m[i].scale / width, NAN,
        "taken at the start of the search and corrected by its steps: no bar can be vouched for"};
    part->derivative_way =
        analytic[i][i] ? PICKET_DERIVATIVE_ANALYTIC : PICKET_DERIVATIVE_DIFFERENCE;
  }
  s->answer->found = 1;
  s->answer->unique_basis = "not shown: with two targets it is not judged";
  return status;
}

static picket_status decline(pk_aim_search *s, const state *at) {
  double values[2];
  to_values(s, at->x, values);
  if (!at->good) {
    const pk_measurement *m = isfinite(at->m[0].q.value) ? &at->m[1] : &at->m[0];
    return pk_aim_decline(s, "there is no value to start from at %.10g and %.10g: %.200s",
                          values[0], values[1], m->reason);
  }
  return pk_aim_decline(s,
                        "the search ends at %.10g and %.10g, where %s is %.8g and %s is %.8g: both "
                        "targets together are not met between the bounds",
                        values[0], values[1], s->part[0].quantity, at->m[0].q.value,
                        s->part[1].quantity, at->m[1].q.value);
}

picket_status pk_aim_two(pk_aim_search *s) {
  state at;
  double jacobian[2][2] = {{0}}, x[2];
  bool analytic[2][2] = {{false}}, good = true, moved = true;
  for (int i = 0; i < 2; i++) { /* from where the file stands, if that is between the bounds */
    double part = (s->start[i] - s->part[i].from) / (s->part[i].to - s->part[i].from);
    x[i] = part > 0 && part < 1 ? part : 0.5;
  }
  picket_status status = measure_at(s, x, &at);
  if (status == PICKET_OK && at.good) {
    status = derivatives(s, &at, jacobian, analytic, &good);
  }
  for (int i = 0; status == PICKET_OK && at.good && good && moved && i < MOST_STEPS; i++) {
    if (is_met(s, &at)) {
      return fill(s, &at, (const double(*)[2])jacobian, (const bool(*)[2])analytic);
    }
    status = take_step(s, &at, jacobian, &moved);
  }
  if (status == PICKET_OK && is_met(s, &at)) {
    return fill(s, &at, (const double(*)[2])jacobian, (const bool(*)[2])analytic);
  }
  return status == PICKET_OK ? decline(s, &at) : status;
}
