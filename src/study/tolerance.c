/* Tolerances: for each family of modes the nominal value, which also says which mode is followed,
 * then two rounds of direct solves for sensitivities, corners and the surrogate, and one for the
 * samples near the limit. See tolerance.h. */
#include "study/tolerance.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

#include "base/hash.h"
#include "base/memory.h"
#include "study/sweep_key.h"
#include "study/tolerance_private.h"

double pk_tolerance_margin(const pk_tolerance_block *block, double value) {
  return isfinite(value) ? fmin(value - block->least, block->most - value) : NAN;
}

picket_status pk_tolerance_ask(pk_tolerance_study *s, const double *deviate, int *task) {
  double values[PK_SPREADS];
  pk_spreading_values(s->spreading, deviate, values);
  return pk_direct_ask(s->direct, values, PK_DIRECT_VALUE, task);
}

const pk_direct_answer *pk_tolerance_answered(const pk_tolerance_study *s, int task) {
  return &s->direct->task[task].answer;
}

/* --- A family -----------------------------------------------------------------------------------
 */

static picket_status start(pk_tolerance_study *s) {
  const picket_quantity none = {NAN, NAN, "was not looked at"};
  const pk_tolerance_block *block = s->block;
  *s->answer = (picket_tolerance_answer){
      .polarization = pk_family_name(s->direct->question.family),
      .quantity = pk_measured_name(block->quantity),
      .unit = pk_measured_unit(block->quantity),
      .at_um = block->at_um,
      .at_least = isfinite(block->least) ? block->least : NAN,
      .at_most = isfinite(block->most) ? block->most : NAN,
      .nominal = none,
      .nominal_meets = -1,
      .corner_convention = "",
      .worst = -1,
      .worst_value = none,
      .surrogate_error = NAN,
      .yield = {
          .value = none, .low = NAN, .high = NAN, .samples = block->samples, .seed = block->seed}};
  return PICKET_OK;
}

static picket_status fall_short(pk_tolerance_study *s, const char *what, const char *why) {
  return pk_result_fall_short(s->result, "%s: %s: %s", s->answer->polarization, what,
                              why ? why : "the reason is not known");
}

/* The value in the file, in this process: its mode is the one that everything else follows. */
static picket_status find_nominal(pk_tolerance_study *s) {
  pk_measurement m;
  s->direct->memory = (pk_measure_memory){0};
  picket_status status =
      pk_measure(s->problem, &s->direct->question, s->direct->options, &s->direct->memory, &m);
  if (status != PICKET_OK) {
    return status;
  }
  picket_quantity q = m.q;
  q.note = NULL;
  if (!isfinite(q.value) || !isfinite(q.uncertainty)) {
    q.note = pk_result_text(s->result, m.reason);
    if (!q.note) {
      return PICKET_ERROR_MEMORY;
    }
  }
  s->answer->nominal = q;
  double margin = pk_tolerance_margin(s->block, q.value);
  s->answer->nominal_meets = fabs(margin) > q.uncertainty ? margin > 0 : -1;
  if (q.note) {
    return fall_short(s, "the nominal value is missing", q.note);
  }
  return m.reached ? PICKET_OK
                   : fall_short(s, "the nominal value is not known to the accuracy asked",
                                "finer grids did not bring its bar down");
}

/* What there is no number for makes a result partial. */
static picket_status check_whole(pk_tolerance_study *s) {
  const picket_tolerance_answer *a = s->answer;
  picket_status status = PICKET_OK;
  for (int i = 0; i < a->sensitivity_count && status == PICKET_OK; i++) {
    const picket_tolerance_sensitivity *one = &a->sensitivities[i];
    if (!isfinite(one->per_unit.value)) {
      status = fall_short(s, "a sensitivity is missing", one->per_unit.note);
    }
  }
  if (status == PICKET_OK && !isfinite(a->worst_value.value)) {
    status = fall_short(s, "the worst corner is missing", a->worst_value.note);
  }
  if (status == PICKET_OK && !isfinite(a->yield.value.value)) {
    status = fall_short(s, "the yield is missing", a->yield.value.note);
  }
  return status;
}

static picket_status ask_first(pk_tolerance_study *s) {
  picket_status status = pk_tolerance_ask_design(s);
  if (status == PICKET_OK) {
    status = pk_tolerance_ask_slopes(s);
  }
  if (status == PICKET_OK) {
    status = pk_tolerance_ask_corners(s);
  }
  return status == PICKET_OK ? pk_direct_solve(s->direct, "design, corners, derivatives") : status;
}

static picket_status ask_second(pk_tolerance_study *s) {
  picket_status status = pk_tolerance_fit(s);
  if (status == PICKET_OK) {
    status = pk_tolerance_ask_worst(s);
  }
  return status == PICKET_OK ? pk_direct_solve(s->direct, "checks near the limit") : status;
}

static picket_status take(pk_tolerance_study *s) {
  picket_status status = pk_tolerance_take_slopes(s);
  if (status == PICKET_OK) {
    status = pk_tolerance_take_checks(s);
  }
  if (status == PICKET_OK) {
    status = pk_tolerance_take_corners(s);
  }
  return status == PICKET_OK ? pk_tolerance_count_yield(s) : status;
}

static picket_status one_family(pk_tolerance_study *s) {
  picket_status status = start(s);
  if (status == PICKET_OK) {
    status = find_nominal(s);
  }
  if (status == PICKET_OK && isfinite(s->answer->nominal.value)) {
    status = ask_first(s);
    if (status == PICKET_OK) {
      status = ask_second(s);
    }
    if (status == PICKET_OK) {
      status = take(s);
    }
    if (status == PICKET_OK) {
      status = check_whole(s);
    }
  }
  s->answer->solves = 1 + pk_direct_solves(s->direct);
  pk_free(s->problem->context, s->design);
  pk_free(s->problem->context, s->corner);
  pk_free(s->problem->context, s->slope);
  return status;
}

/* --- All families -------------------------------------------------------------------------------
 */

/* The path of the first number that lies in a structure, or null. */
static const char *path_in_structure(const pk_tolerance_block *block) {
  static const char *const structures[] = {"cell.", "section.", "channel."};
  for (int i = 0; i < block->count; i++) {
    for (int k = 0; k < 3; k++) {
      if (strncmp(block->spread[i].vary, structures[k], strlen(structures[k])) == 0) {
        return block->spread[i].vary;
      }
    }
  }
  return NULL;
}

static picket_status make_question(const pk_problem *problem, pk_question *out) {
  const pk_tolerance_block *block = &problem->tolerance;
  out->what = block->quantity;
  out->at_um = block->at_um;
  picket_status status = pk_question_structure(problem, block->quantity, path_in_structure(block),
                                               block->place, &out->structure);
  if (status == PICKET_OK && block->quantity == PK_MEASURED_CLEARANCE &&
      problem->light.count == 0) {
    status = pk_fail_at(problem->context, PICKET_ERROR_INPUT, block->place,
                        "clearance_nm needs \"light.wavelength_nm\", the operating band, which is "
                        "not given");
  }
  return status;
}

static picket_status all_families(const pk_problem *problem, const pk_spreading *spreading,
                                  pk_direct *direct, picket_result *result) {
  const pk_tolerance_block *block = &problem->tolerance;
  pk_family family[2];
  int count = pk_question_families(problem, direct->question.structure, block->family_given,
                                   block->wanted, family);
  picket_status status = PICKET_OK;
  for (int f = 0; f < count && status == PICKET_OK; f++) {
    direct->question.family = family[f];
    pk_tolerance_study s = {.problem = problem,
                            .block = block,
                            .spreading = spreading,
                            .direct = direct,
                            .result = result,
                            .worst_task = -1,
                            .answer = &result->tolerance[result->count++]};
    status = one_family(&s);
  }
  return status;
}

static picket_status open_journal(const pk_problem *problem, pk_direct *direct, uint64_t document,
                                  const char *journal) {
  /* The kind and the source are those of a sweep, for its fingerprint. */
  const pk_sweep_kind kind = {.result = PK_RESULT_TOLERANCE};
  const pk_sweep_source source = {.problem = problem, .document = document};
  return journal ? pk_direct_resume(direct, journal,
                                    pk_sweep_key_of_run(&kind, &source, direct->options))
                 : PICKET_OK;
}

picket_status pk_study_tolerance(const pk_problem *problem, const pk_variants *variants,
                                 const double *start, const picket_options *options,
                                 uint64_t document, const char *journal, picket_result **out) {
  pk_spreading spreading;
  pk_direct direct = {.variants = variants, .options = options};
  picket_status status = make_question(problem, &direct.question);
  if (status == PICKET_OK) {
    status = pk_result_create(problem->context, PK_RESULT_TOLERANCE, problem->name,
                              options->accuracy, &direct.result);
  }
  if (status != PICKET_OK) {
    return status;
  }
  pk_spreading_make(problem->tolerance.count, problem->tolerance.spread, start, &spreading);
  direct.result->tolerance = PK_NEW(problem->context, 2, picket_tolerance_answer);
  status = direct.result->tolerance ? PICKET_OK : PICKET_ERROR_MEMORY;
  if (status == PICKET_OK) {
    status = open_journal(problem, &direct, document, journal);
  }
  if (status == PICKET_OK) {
    status = all_families(problem, &spreading, &direct, direct.result);
  }
  pk_direct_clear(&direct);
  if (status != PICKET_OK) {
    pk_result_free(direct.result);
    return status;
  }
  *out = direct.result;
  return PICKET_OK;
}

void pk_tolerance_answer_clear(picket_context *context, picket_tolerance_answer *answer) {
  for (int i = 0; answer->corners && i < answer->corner_count; i++) {
    pk_free(context, (void *)answer->corners[i].places);
  }
  pk_free(context, (void *)answer->corners);
  pk_free(context, (void *)answer->sensitivities);
  pk_free(context, (void *)answer->deviates);
  pk_free(context, (void *)answer->checks);
}
