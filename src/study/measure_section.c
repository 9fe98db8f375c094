/* Measurements of a section: index, group index and what temperature does to them. See measure.h.
 *
 * dn/dT is a difference of direct solves. It is held against first-order perturbation, which needs
 * one solve only: at a fixed β a medium that changes by δε moves the frequency by
 *   δω/ω = -½ Σ s_m δε_m/ε_m,   s_m: share of the electric energy ∫ε|E|² in medium m,
 * and with the group index without dispersion, n_0 = n_g / (1 + ½ Σ s_m (k0 dε_m/dk0)/ε_m),
 *   dn/dT = ½ n_0 Σ s_m (dε_m/dT)/ε_m.
 * The shares are those of the finest grid, so the second is the less exact of the two, and how far
 * they lie apart is the bar. */
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/memory.h"
#include "study/measure_private.h"
#include "study/study.h"

enum {
  FIRST_MOST = 2, /* the fundamental modes of both families are mostly the first two */
  LAST_MOST = 16  /* a wide guide has many modes of one family above the first of the other */
};

/* A mode that hybridises changes its share gradually; another family's differs by nearly 1. */
static const double MOST_SHARE_CHANGE = 0.5;

/* Half of the span of the difference over temperature, K: indices are known to some 1e-7 from grid
 * to grid and change by some 1e-4 per kelvin; what is left of curvature shows in the bar. */
static const double WARM_STEP_K = 5;

static const double PM_PER_UM = 1e6;

typedef struct found {
  bool there;
  picket_section_mode mode; /* without confinement */
  double rate;              /* dn/dT by perturbation; NaN where it does not apply */
} found;

/* ½ n_0 Σ s (dε/dT)/ε of a mode. */
static picket_status perturbed_rate(const pk_problem *problem, double at_um,
                                    const picket_section_mode *mode, double *rate) {
  double complex warm = 0, spread = 0;
  bool layered = false;
  for (int i = 0; i < mode->material_count; i++) {
    int m = pk_materials_find(problem->materials, mode->confinement[i].material);
    pk_medium medium;
    picket_status status =
        pk_materials_at(problem->materials, m, at_um, problem->temperature_c, &medium);
    if (status != PICKET_OK) {
      return status;
    }
    double share = mode->confinement[i].share;
    layered = layered || pk_materials_is_layered(problem->materials, m);
    warm += 0.5 * share * medium.temperature_slope / medium.permittivity;
    spread += 0.5 * share * medium.slope / medium.permittivity;
  }
  *rate = layered ? NAN : creal(warm) * mode->group_index.value / (1 + creal(spread));
  return PICKET_OK;
}

/* Without a memory the fundamental mode of its family, else the mode remembered. */
static bool is_it(const pk_measure_memory *memory, pk_family family,
                  const picket_section_mode *mode) {
  if (memory->known) {
    return mode->nodes_x == memory->nodes[0] && mode->nodes_y == memory->nodes[1] &&
           fabs(mode->ex_share - memory->ex_share) < MOST_SHARE_CHANGE;
  }
  return (mode->ex_share > 0.5) == (family == PK_FAMILY_TE_LIKE);
}

/* The mode at the problem's own temperature, out of the first `most`. */
static picket_status find_among(const pk_problem *problem, const pk_question *question,
                                const picket_options *options, const pk_measure_memory *memory,
                                int most, found *out, int *count) {
  pk_lit lit;
  picket_result *result = NULL;
  picket_options chosen = *options;
  chosen.count = most;
  pk_lit_make(problem, question->at_um, -1, &lit);
  picket_status status = pk_study_modes(&lit.problem, &chosen, &result);
  out->there = false;
  *count = 0;
  if (status == PICKET_OK) {
    const picket_modes_point *point = &result->modes->points[0];
    *count = point->mode_count;
    for (int i = 0; status == PICKET_OK && !out->there && i < point->mode_count; i++) {
      out->there = is_it(memory, question->family, &point->modes[i]);
      out->mode = point->modes[i];
      if (out->there) {
        status = perturbed_rate(&lit.problem, question->at_um, &point->modes[i], &out->rate);
      }
    }
    out->mode.confinement = NULL; /* it goes with the result */
    out->mode.material_count = 0;
  }
  pk_result_free(result);
  return status;
}

/* Notes of a mode are static texts of the study, so the mode may outlive its result. */
static picket_status find_mode(const pk_problem *problem, const pk_question *question,
                               const picket_options *options, pk_measure_memory *memory, found *out,
                               pk_measurement *m) {
  int most = memory->most > 0 ? memory->most : FIRST_MOST, count = 0;
  picket_status status = find_among(problem, question, options, memory, most, out, &count);
  while (status == PICKET_OK && !out->there && count == most && most < LAST_MOST) {
    most *= 2;
    status = find_among(problem, question, options, memory, most, out, &count);
  }
  if (status == PICKET_OK && !out->there) {
    pk_measurement_refuse(m, "the section has no %s mode %sthere", pk_family_name(question->family),
                          memory->known ? "of the shape that is followed " : "");
  } else if (status == PICKET_OK) {
    memory->most = most;
    memory->nodes[0] = out->mode.nodes_x;
    memory->nodes[1] = out->mode.nodes_y;
    memory->ex_share = out->mode.ex_share;
  }
  return status;
}

pk_warm_points pk_warm_points_around(double t) {
  double h = WARM_STEP_K;
  if (fabs(t - PK_BREAK_C) > h) {
    return (pk_warm_points){2, {t - h, t + h, 0}, {-0.5 / h, 0.5 / h, 0}, {0.5, 0.5, 0}};
  }
  double s = t >= PK_BREAK_C ? h : -h; /* (-3 f(0) + 4 f(1) - f(2)) / 2 per step */
  return (pk_warm_points){3, {t, t + s, t + 2 * s}, {-1.5 / s, 2 / s, -0.5 / s}, {1, 0, 0}};
}

/* dn/dT and the group index. */
static picket_status index_rate(const pk_problem *problem, const pk_question *question,
                                const picket_options *options, pk_measure_memory *memory,
                                picket_quantity *rate, picket_quantity *group, pk_measurement *m) {
  pk_warm_points pair = pk_warm_points_around(problem->temperature_c);
  double perturbed = 0, bars = 0;
  *rate = *group = (picket_quantity){0, 0, NULL};
  for (int i = 0; i < pair.count; i++) {
    pk_problem moved = *problem;
    found f;
    moved.temperature_c = pair.at[i];
    picket_status status = find_mode(&moved, question, options, memory, &f, m);
    if (status != PICKET_OK || !f.there) {
      rate->value = NAN;
      return status;
    }
    memory->known = true;
    rate->value += pair.weight[i] * f.mode.index.value;
    bars += fabs(pair.weight[i]) * f.mode.index.uncertainty;
    perturbed += pair.here[i] * f.rate;
    group->value += pair.here[i] * f.mode.group_index.value;
    group->uncertainty = fmax(group->uncertainty, f.mode.group_index.uncertainty);
  }
  rate->uncertainty = isnan(perturbed) ? bars : fabs(rate->value - perturbed);
  return PICKET_OK;
}

static picket_status take_rate(const pk_problem *problem, const pk_question *question,
                               const picket_options *options, pk_measure_memory *memory,
                               pk_measurement *out) {
  picket_quantity rate, group;
  double largest = 0;
  picket_status status = pk_measure_largest_rate(problem, question->at_um, &largest);
  if (status == PICKET_OK) {
    status = index_rate(problem, question, options, memory, &rate, &group, out);
  }
  if (status != PICKET_OK || !isfinite(rate.value)) {
    return status;
  }
  double factor = 1;
  if (question->what == PK_MEASURED_DRIFT) {
    factor = PM_PER_UM * question->at_um / group.value;
    rate.uncertainty += fabs(rate.value) * group.uncertainty / group.value;
  }
  pk_measurement_take(out, rate, factor, factor * largest, options->accuracy);
  return PICKET_OK;
}

picket_status pk_measure_section(const pk_problem *problem, const pk_question *question,
                                 const picket_options *options, pk_measure_memory *memory,
                                 pk_measurement *out) {
  found f;
  if (question->what == PK_MEASURED_INDEX_RATE || question->what == PK_MEASURED_DRIFT) {
    return take_rate(problem, question, options, memory, out);
  }
  picket_status status = find_mode(problem, question, options, memory, &f, out);
  if (status == PICKET_OK && f.there) {
    picket_quantity q = question->what == PK_MEASURED_INDEX ? f.mode.index : f.mode.group_index;
    pk_measurement_take(out, q, 1, fabs(q.value), options->accuracy);
  }
  return status;
}
