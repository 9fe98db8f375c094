/* The number that meets a target: for each family of modes a search (aim_one.c, aim_two.c), then
 * what a mask makes of the answer. See aim.h.
 *
 * A solution counts as met within half of the accuracy asked, so that bar and distance together
 * stay near it. */
#include "study/aim.h"

#include <math.h>
#include <stdarg.h>
#include <stdio.h>
#include <string.h>

#include "base/memory.h"
#include "study/aim_private.h"
#include "study/feature.h"

static const double MET = 0.5; /* of the accuracy asked */
static const double NM_PER_UM = 1e3;
static const double SLACK = 1e-9; /* of a bound: what rounding may take from a value on the grid */

picket_status pk_aim_measure(pk_aim_search *s, int k, const double *values, double accuracy,
                             pk_measurement *out) {
  picket_context *context = s->problem->context;
  pk_problem *problem = NULL;
  picket_options chosen = *s->options;
  chosen.accuracy = accuracy;
  picket_status status = s->variants->make(s->variants->user, values, &problem);
  if (status == PICKET_ERROR_INPUT) {
    *out = (pk_measurement){.q = {NAN, NAN, NULL}, .scale = NAN, .limit = NAN};
    snprintf(out->reason, sizeof out->reason, "%s", picket_context_message(context));
    out->q.note = out->reason;
    pk_message_clear(context);
    return PICKET_OK;
  }
  if (status == PICKET_OK) {
    status = pk_measure(problem, &s->question[k], &chosen, &s->memory[k], out);
    s->solves++;
  }
  if (status == PICKET_OK && pk_log_wanted(context, PICKET_LOG_INFO)) {
    pk_log(context, PICKET_LOG_INFO, "aim, %s: %s is %.10g at %.10g%s%.10g",
           pk_family_name(s->family), pk_measured_name(s->question[k].what), out->q.value,
           values[0], s->variants->count > 1 ? ", " : " to ",
           s->variants->count > 1 ? values[1] : accuracy);
  }
  pk_problem_free(problem);
  return status;
}

double pk_aim_tolerance(const pk_aim_search *s, const pk_measurement *m) {
  return MET * s->options->accuracy * m->scale;
}

picket_status pk_aim_quantity(pk_aim_search *s, const pk_measurement *m, picket_quantity *out) {
  picket_quantity q = m->q;
  q.note = NULL;
  if (!isfinite(q.value) || !isfinite(q.uncertainty)) {
    q.note = pk_result_text(s->result, m->reason);
  }
  *out = q;
  return q.note || (isfinite(q.value) && isfinite(q.uncertainty)) ? PICKET_OK : PICKET_ERROR_MEMORY;
}

picket_status pk_aim_decline(pk_aim_search *s, const char *format, ...) {
  char text[512];
  va_list arguments;
  va_start(arguments, format);
  vsnprintf(text, sizeof text, format, arguments);
  va_end(arguments);
  s->answer->found = 0;
  s->answer->unique = -1;
  s->answer->unique_basis = "there is no solution to judge";
  s->answer->reason = pk_result_text(s->result, text);
  for (int k = 0; k < s->answer->part_count; k++) {
    const picket_quantity none = {NAN, NAN, s->answer->reason};
    s->part[k].value = s->part[k].achieved = s->part[k].derivative = none;
  }
  return s->answer->reason
             ? pk_result_fall_short(s->result, "%s: %s", s->answer->polarization, text)
             : PICKET_ERROR_MEMORY;
}

/* --- Rules of the mask ------------------------------------------------------------------------
 */

static picket_status judge_rules(pk_aim_search *s, const double *values, double *smallest_um,
                                 int *verdict) {
  pk_problem *problem = NULL;
  picket_status status = s->variants->make(s->variants->user, values, &problem);
  if (status == PICKET_OK) {
    *smallest_um = pk_smallest_feature(problem, s->question[0].structure);
    *verdict = pk_feature_respects(&s->problem->rules, *smallest_um);
  }
  pk_problem_free(problem);
  return status;
}

/* Whether a number is a length in the plane, which a mask draws. */
static bool is_drawn(const char *path) {
  const char *found = NULL;
  for (const char *at = strstr(path, "_nm"); at; at = strstr(at + 1, "_nm")) {
    found = at;
  }
  bool structure = strncmp(path, "cell.", 5) == 0 || strncmp(path, "channel.", 8) == 0 ||
                   strncmp(path, "section.", 8) == 0;
  return structure && found && (found[3] == '\0' || found[3] == '.') &&
         !strstr(path, "height_nm") && !strstr(path, "span_nm");
}

/* The nearest multiple of the grid between the bounds. */
static double on_grid(double value, double grid, double from, double to) {
  double snapped = grid * round(value / grid);
  if (snapped > to * (1 + SLACK)) {
    snapped = grid * floor(to / grid * (1 + SLACK));
  }
  if (snapped < from * (1 - SLACK)) {
    snapped = grid * ceil(from / grid * (1 - SLACK));
  }
  return snapped;
}

static picket_status snap(pk_aim_search *s, double *values) {
  double grid_nm = NM_PER_UM * s->problem->rules.grid_um;
  for (int k = 0; k < s->answer->part_count; k++) {
    if (grid_nm > 0 && is_drawn(s->part[k].vary)) {
      values[k] = on_grid(values[k], grid_nm, s->part[k].from, s->part[k].to);
      s->part[k].snapped = values[k];
      s->answer->snapped = 1;
    }
  }
  if (!s->answer->snapped) {
    return PICKET_OK;
  }
  picket_status status = judge_rules(s, values, &s->answer->snapped_smallest_feature_um,
                                     &s->answer->snapped_respects_rules);
  for (int k = 0; status == PICKET_OK && k < s->answer->part_count; k++) {
    pk_measurement m;
    status = pk_aim_measure(s, k, values, s->options->accuracy, &m);
    if (status == PICKET_OK) {
      status = pk_aim_quantity(s, &m, &s->part[k].snapped_achieved);
    }
  }
  return status;
}

static picket_status apply_rules(pk_aim_search *s) {
  double values[PK_AIM_PARTS];
  for (int k = 0; k < s->answer->part_count; k++) {
    values[k] = s->part[k].value.value;
  }
  picket_status status =
      judge_rules(s, values, &s->answer->smallest_feature_um, &s->answer->respects_rules);
  return status == PICKET_OK ? snap(s, values) : status;
}

/* --- A family ---------------------------------------------------------------------------------
 */

static picket_status start_parts(pk_aim_search *s) {
  const pk_aim_block *aim = &s->problem->aim;
  const picket_quantity none = {NAN, NAN, "was not looked at"};
  for (int k = 0; k < aim->count; k++) {
    const pk_aim_part *from = &aim->part[k];
    s->part[k] = (picket_aim_part){.vary = pk_result_text(s->result, from->vary),
                                   .from = from->between[0],
                                   .to = from->between[1],
                                   .quantity = pk_measured_name(from->quantity),
                                   .unit = pk_measured_unit(from->quantity),
                                   .target = from->target,
                                   .at_um = from->at_um,
                                   .value = none,
                                   .achieved = none,
                                   .derivative = none,
                                   .at_from = none,
                                   .at_to = none,
                                   .snapped = NAN,
                                   .snapped_achieved = none};
    if (!s->part[k].vary) {
      return PICKET_ERROR_MEMORY;
    }
    s->question[k].family = s->family;
  }
  return PICKET_OK;
}

/* A bar above the accuracy asked makes a result partial. */
static picket_status check_reached(pk_aim_search *s) {
  for (int k = 0; k < s->answer->part_count; k++) {
    picket_quantity q = s->part[k].achieved;
    if (s->answer->found && !s->reached[k]) {
      return pk_result_fall_short(s->result, "%s: %s is not known to %.1g: %s",
                                  s->answer->polarization, s->part[k].quantity,
                                  s->options->accuracy,
                                  q.note ? q.note : "finer grids did not bring its bar down");
    }
  }
  return PICKET_OK;
}

static picket_status one_family(pk_aim_search *s) {
  picket_status status = start_parts(s);
  *s->answer = (picket_aim_answer){.polarization = pk_family_name(s->family),
                                   .part_count = s->problem->aim.count,
                                   .parts = s->part,
                                   .unique = -1,
                                   .unique_basis = "",
                                   .smallest_feature_um = NAN,
                                   .respects_rules = -1,
                                   .snapped_smallest_feature_um = NAN,
                                   .snapped_respects_rules = -1};
  if (status == PICKET_OK) {
    status = s->problem->aim.count == 1 ? pk_aim_one(s) : pk_aim_two(s);
  }
  if (status == PICKET_OK && s->answer->found) {
    status = apply_rules(s);
  }
  s->answer->solves = s->solves;
  s->answer->derivative_passes = s->passes;
  return status == PICKET_OK ? check_reached(s) : status;
}

static picket_status check_light(const pk_problem *problem, const pk_aim_part *part) {
  if (part->quantity == PK_MEASURED_CLEARANCE && problem->light.count == 0) {
    return pk_fail_at(
        problem->context, PICKET_ERROR_INPUT, part->place,
        "clearance_nm needs \"light.wavelength_nm\", the operating band, which is not "
        "given");
  }
  return PICKET_OK;
}

/* Questions of the parts, without the family. */
static picket_status ask(const pk_problem *problem, pk_question *question) {
  const pk_aim_block *aim = &problem->aim;
  for (int k = 0; k < aim->count; k++) {
    const pk_aim_part *part = &aim->part[k];
    question[k].what = part->quantity;
    question[k].at_um = part->at_um;
    picket_status status = pk_question_structure(problem, part->quantity, part->vary, part->place,
                                                 &question[k].structure);
    if (status == PICKET_OK) {
      status = check_light(problem, part);
    }
    if (status != PICKET_OK) {
      return status;
    }
  }
  if (aim->count == 2 && question[0].structure != question[1].structure) {
    return pk_fail_at(
        problem->context, PICKET_ERROR_INPUT, aim->part[1].place,
        "aim.also asks for %s of another structure than aim does for %s; both must be "
        "of one",
        pk_measured_name(question[1].what), pk_measured_name(question[0].what));
  }
  return PICKET_OK;
}

static picket_status all_families(const pk_problem *problem, const pk_variants *variants,
                                  const double *start, const picket_options *options,
                                  const pk_question *question, picket_result *result) {
  pk_family family[2];
  const pk_aim_block *aim = &problem->aim;
  int count =
      pk_question_families(problem, question[0].structure, aim->family_given, aim->wanted, family);
  picket_status status = PICKET_OK;
  for (int f = 0; f < count && status == PICKET_OK; f++) {
    pk_aim_search s = {.problem = problem,
                       .variants = variants,
                       .options = options,
                       .start = start,
                       .family = family[f],
                       .question = {question[0], question[1]},
                       .result = result,
                       .answer = &result->aim[result->count]};
    s.part = PK_NEW(problem->context, problem->aim.count, picket_aim_part);
    if (!s.part) {
      return PICKET_ERROR_MEMORY;
    }
    s.answer->parts = s.part; /* the result's from here on */
    result->count++;
    status = one_family(&s);
  }
  return status;
}

picket_status pk_study_aim(const pk_problem *problem, const pk_variants *variants,
                           const double *start, const picket_options *options,
                           picket_result **out) {
  pk_question question[PK_AIM_PARTS] = {{0}};
  picket_result *result = NULL;
  picket_status status = ask(problem, question);
  if (status == PICKET_OK) {
    status = pk_result_create(problem->context, PK_RESULT_AIM, problem->name, options->accuracy,
                              &result);
  }
  if (status == PICKET_OK) {
    result->aim = PK_NEW(problem->context, 2, picket_aim_answer);
    status = result->aim ? PICKET_OK : PICKET_ERROR_MEMORY;
  }
  if (status == PICKET_OK) {
    status = all_families(problem, variants, start, options, question, result);
  }
  if (status != PICKET_OK) {
    pk_result_free(result);
    return status;
  }
  *out = result;
  return PICKET_OK;
}
