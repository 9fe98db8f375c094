/* One number for one target: f(x) = t on a bracket. See aim_private.h.
 *
 * The ends are measured coarsely. Inside, the next point is where the fraction through the points
 * at hand meets the target (interpolate; with a derivative it is Newton's method and a correction),
 * and half the bracket where that leaves it. Each inner point is measured at the accuracy asked, so
 * the last one is the proof. */
#include <math.h>

#include "study/aim_private.h"

enum {
  MOST_STEPS = 14, /* halving alone gives 1e-4 of the bracket by then */
  NODES = 4        /* points of a fraction: more would follow the noise of coarse ones */
};
static const double FAR_FROM_NOISE = 20; /* tolerances between samples for a derivative */
static const double NARROWEST = 1e-9;    /* of the bracket: a change of sign in less is a jump */

/* --- Steps inside -----------------------------------------------------------------------------
 */

/* x at the target by the continued fraction through samples, x as a function of the residual r
 * (T. N. Thiele 1909):
 *   x(r) = x_0 + (r - r_0)/(φ_1 + (r - r_1)/(φ_2 + (r - r_2)/...)),
 *   φ_k[0..k] = (r_k - r_{k-1}) / (φ_{k-1}[0..k-2, k] - φ_{k-1}[0..k-1]),  φ_0[k] = x_k.
 * It follows quantities that level off, as most here do, from three points; and like Newton's
 * method from one with a derivative, which stands first and twice: φ_1[0, 0] is its slope. */
static double interpolate(const pk_aim_search *s, int count, const int *sample) {
  double r[NODES + 1], phi[NODES + 1];
  double slope = s->sample[sample[0]].slope;
  bool twice = isfinite(slope);
  int n = 0;
  for (int i = 0; i < count; i++) {
    for (int k = 0; k < (i == 0 && twice ? 2 : 1); k++) {
      r[n] = pk_aim_residual(s, sample[i]);
      phi[n++] = s->sample[sample[i]].x;
    }
  }
  for (int order = 1; order < n; order++) {
    for (int k = n - 1; k >= order; k--) {
      bool same = order == 1 && k == 1 && twice;
      phi[k] = same ? slope : (r[k] - r[order - 1]) / (phi[k] - phi[order - 1]);
    }
  }
  double x = phi[n - 1];
  for (int k = n - 2; k >= 0; k--) {
    x = phi[k] - r[k] / x; /* the target is at residual 0 */
  }
  return x;
}

/* Adds a sample to a list unless it is there or the list is full. */
static void list_sample(int i, int *node, int *count) {
  for (int k = 0; k < *count; k++) {
    if (node[k] == i) {
      return;
    }
  }
  if (*count < NODES) {
    node[(*count)++] = i;
  }
}

/* The point with a derivative first, then the ends of the bracket and the last ones; the next point
 * lies inside the bracket. */
static double propose(const pk_aim_search *s, const pk_aim_bracket *b, int first_inner) {
  int node[NODES], count = 0;
  for (int i = first_inner; i < s->count; i++) {
    if (isfinite(s->sample[i].slope)) {
      list_sample(i, node, &count);
    }
  }
  if (s->count > first_inner) {
    list_sample(s->count - 1, node, &count);
  }
  list_sample(b->low, node, &count);
  list_sample(b->high, node, &count);
  for (int i = s->count - 1; i >= 0; i--) {
    if (pk_aim_is_good(s, i)) {
      list_sample(i, node, &count);
    }
  }
  double low = s->sample[b->low].x, high = s->sample[b->high].x;
  for (; count >= 2; count--) { /* the ones that weigh least go first */
    double x = interpolate(s, count, node);
    if (x > low && x < high) {
      return x;
    }
  }
  return 0.5 * (low + high);
}

/* The analytic derivative at a sample, where there is one. Coarse grids do: it sets the next step,
 * and a bar. */
static picket_status take_slope(pk_aim_search *s, int i) {
  pk_aim_sample *sample = &s->sample[i];
  pk_measured_slope slope;
  picket_options chosen = *s->options;
  chosen.accuracy = pk_aim_coarse_accuracy(s);
  if (!pk_measured_has_slope(s->question[0].what, s->question[0].structure) ||
      isfinite(sample->slope)) {
    return PICKET_OK;
  }
  picket_status status =
      pk_measure_slope_analytic(s->variants, &sample->x, 0, &s->question[0], &chosen, &slope);
  s->passes++;
  if (status == PICKET_OK && isfinite(slope.q.value) && slope.q.value != 0) {
    sample->slope = slope.q.value;
    sample->slope_bar = slope.q.uncertainty;
  }
  return status;
}

/* Whether the last two steps together did not halve what is left. */
static bool is_slow(const pk_aim_search *s, int first_inner) {
  int last = s->count - 1;
  return last - 2 >= first_inner &&
         fabs(pk_aim_residual(s, last)) > 0.5 * fabs(pk_aim_residual(s, last - 2));
}

/* *met is the sample that meets the target, -1 if a value was lost or jumps. */
static picket_status refine(pk_aim_search *s, pk_aim_bracket *b, int *met) {
  int first_inner = s->count;
  *met = pk_aim_is_met(s, b->low) ? b->low : pk_aim_is_met(s, b->high) ? b->high : -1;
  if (*met >= 0 && s->sample[*met].accuracy > s->options->accuracy) {
    double x = s->sample[*met].x;
    int at = 0;
    picket_status status = pk_aim_take(s, x, s->options->accuracy, &at);
    if (status != PICKET_OK || pk_aim_is_met(s, at)) {
      *met = at;
      return status;
    }
    *met = -1;
  }
  for (int step = 0; step < MOST_STEPS && *met < 0; step++) {
    int at = 0;
    double low = s->sample[b->low].x, high = s->sample[b->high].x;
    if (high - low <= NARROWEST * pk_aim_width(s)) {
      return PICKET_OK;
    }
    double x = is_slow(s, first_inner) ? 0.5 * (low + high) : propose(s, b, first_inner);
    picket_status status = pk_aim_take(s, x, s->options->accuracy, &at);
    if (status == PICKET_OK && pk_aim_is_good(s, at) && step == 0 && !pk_aim_is_met(s, at)) {
      status = take_slope(s, at);
    }
    if (status != PICKET_OK || !pk_aim_is_good(s, at)) {
      return status;
    }
    *met = pk_aim_is_met(s, at) ? at : -1;
    if (pk_aim_straddles(s, at, b->low)) {
      b->high = at;
    } else {
      b->low = at;
    }
  }
  return PICKET_OK;
}

/* --- What was found ---------------------------------------------------------------------------
 */

/* The two samples nearest to sample i that differ from it by more than some tolerances. */
static void nearest_samples(const pk_aim_search *s, int i, double tolerances, int near[2]) {
  near[0] = near[1] = -1;
  for (int k = 0; k < s->count; k++) {
    double d = fabs(s->sample[k].x - s->sample[i].x);
    bool noise = fabs(s->sample[k].m.q.value - s->sample[i].m.q.value) <=
                 tolerances * pk_aim_tolerance(s, &s->sample[i].m);
    if (k == i || !pk_aim_is_good(s, k) || noise || d <= NARROWEST * pk_aim_width(s)) {
      continue;
    }
    if (near[0] < 0 || d < fabs(s->sample[near[0]].x - s->sample[i].x)) {
      near[1] = near[0];
      near[0] = k;
    } else if (near[1] < 0 || d < fabs(s->sample[near[1]].x - s->sample[i].x)) {
      near[1] = k;
    }
  }
}

/* The derivative at sample i from the two others nearest to it, if possible not so near that only
 * noise is between them: of the parabola, with the difference to the nearer secant as the bar. */
static picket_quantity sampled_slope(const pk_aim_search *s, int i) {
  int near[2];
  nearest_samples(s, i, FAR_FROM_NOISE, near);
  if (near[1] < 0) {
    nearest_samples(s, i, 0, near);
  }
  if (near[1] < 0) {
    return (picket_quantity){NAN, NAN, "there are too few samples for a derivative"};
  }
  double x = s->sample[i].x, f = s->sample[i].m.q.value;
  double d[2], secant[2];
  for (int k = 0; k < 2; k++) {
    d[k] = s->sample[near[k]].x - x;
    secant[k] = (s->sample[near[k]].m.q.value - f) / d[k];
  }
  double slope = (secant[0] * d[1] - secant[1] * d[0]) / (d[1] - d[0]);
  return (picket_quantity){slope, fabs(slope - secant[0]), NULL};
}

static picket_status find_slope(pk_aim_search *s, int met) {
  picket_aim_part *part = &s->part[0];
  picket_status status = take_slope(s, met);
  if (isfinite(s->sample[met].slope)) {
    part->derivative = (picket_quantity){s->sample[met].slope, s->sample[met].slope_bar, NULL};
    part->derivative_way = PICKET_DERIVATIVE_ANALYTIC;
  } else {
    part->derivative = sampled_slope(s, met);
    part->derivative_way =
        isfinite(part->derivative.value) ? PICKET_DERIVATIVE_SAMPLES : PICKET_DERIVATIVE_NONE;
  }
  return status;
}

static double bar_of(const pk_aim_search *s, int i) {
  double bar = s->sample[i].m.q.uncertainty;
  return isfinite(bar) ? bar : 0;
}

/* Every sample lies on the same side of the one found as its value says. */
static bool is_monotone(const pk_aim_search *s, int met, bool *whole) {
  double sign = s->part[0].derivative.value > 0 ? 1 : -1;
  bool monotone = isfinite(s->part[0].derivative.value);
  *whole = true;
  for (int i = 0; i < s->count; i++) {
    *whole = *whole && pk_aim_is_good(s, i);
    monotone = monotone && !(isfinite(s->sample[i].slope) && s->sample[i].slope * sign <= 0);
    for (int k = 0; k < s->count && monotone; k++) {
      if (pk_aim_is_good(s, i) && pk_aim_is_good(s, k) && s->sample[i].x < s->sample[k].x) {
        double noise = pk_aim_tolerance(s, &s->sample[met].m) + bar_of(s, i) + bar_of(s, k);
        double rise = sign * (s->sample[k].m.q.value - s->sample[i].m.q.value);
        monotone = rise > -noise;
      }
    }
  }
  return monotone;
}

static void judge_unique(pk_aim_search *s, int met) {
  bool whole = false;
  bool monotone = is_monotone(s, met, &whole);
  if (s->answer->unique == 0) {
    return;
  }
  if (!whole) {
    s->answer->unique_basis = "not shown: there is no value in a part of the range";
  } else if (monotone && s->count >= 3) {
    s->answer->unique = 1;
    s->answer->unique_basis =
        "the values at all sampled points, both bounds among them, and the derivatives there say "
        "that the quantity is monotone; between the points it was not looked at";
  } else {
    s->answer->unique_basis = "not shown: the quantity is not monotone over the sampled points";
  }
}

static picket_status finish(pk_aim_search *s, int met) {
  picket_aim_part *part = &s->part[0];
  const pk_measurement *m = &s->sample[met].m;
  picket_status status = find_slope(s, met);
  if (status == PICKET_OK) {
    status = pk_aim_quantity(s, m, &part->achieved);
  }
  double bar = (m->q.uncertainty + fabs(pk_aim_residual(s, met))) / fabs(part->derivative.value);
  part->value = (picket_quantity){s->sample[met].x, bar, NULL};
  if (isnan(bar)) {
    part->value.note = part->achieved.note ? part->achieved.note : part->derivative.note;
  }
  s->answer->found = 1;
  s->reached[0] = m->reached;
  judge_unique(s, met);
  return status;
}

static picket_status decline(pk_aim_search *s, const pk_aim_bracket *b) {
  const pk_aim_sample *a = &s->sample[0], *z = &s->sample[1];
  const char *name = s->part[0].quantity;
  if (b->found) {
    const pk_aim_sample *last = &s->sample[s->count - 1];
    if (!isfinite(last->m.q.value)) {
      return pk_aim_decline(s, "at %.10g, between the bounds, %s has no value: %.200s", last->x,
                            name, last->m.reason);
    }
    return pk_aim_decline(s, "%s jumps over the target near %.10g: from %.8g to %.8g", name,
                          s->sample[b->low].x, s->sample[b->low].m.q.value,
                          s->sample[b->high].m.q.value);
  }
  if (isfinite(a->m.q.value) && isfinite(z->m.q.value)) {
    return pk_aim_decline(s, "%s is %.8g at %.10g and %.8g at %.10g, and does not meet %.10g", name,
                          a->m.q.value, a->x, z->m.q.value, z->x, s->part[0].target);
  }
  if (b->last >= 0) {
    const pk_aim_sample *last = &s->sample[b->last];
    return pk_aim_decline(s,
                          "%s is %.8g at %.10g, has no value at %.10g (%.160s), and %.10g was not "
                          "met before",
                          name, last->m.q.value, last->x, b->gap,
                          isfinite(a->m.q.value) ? z->m.reason : a->m.reason, s->part[0].target);
  }
  return pk_aim_decline(s, "%s has no value at %.10g: %.200s; nor at %.10g", name, a->x,
                        a->m.reason, z->x);
}

picket_status pk_aim_one(pk_aim_search *s) {
  pk_aim_bracket b = {false, 0, 0, -1, NAN};
  int met = -1;
  picket_status status = pk_aim_find_bracket(s, &b);
  if (status == PICKET_OK) {
    status = pk_aim_quantity(s, &s->sample[0].m, &s->part[0].at_from);
  }
  if (status == PICKET_OK) {
    status = pk_aim_quantity(s, &s->sample[1].m, &s->part[0].at_to);
  }
  if (status == PICKET_OK && b.found) {
    status = refine(s, &b, &met);
  }
  if (status != PICKET_OK) {
    return status;
  }
  return met >= 0 ? finish(s, met) : decline(s, &b);
}
