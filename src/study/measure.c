/* See measure.h: names, the choice of a structure, and what the measurements of all structures
 * share. */
#include "study/measure.h"

#include <math.h>
#include <stdarg.h>
#include <stdio.h>
#include <string.h>

#include "study/measure_private.h"

typedef struct kind {
  const char *name, *unit;
  bool at_wavelength;
  bool of[PK_STRUCTURE_CHANNEL + 1]; /* cell, section, channel */
} kind;

static const kind KINDS[PK_MEASURED_COUNT] = {
    [PK_MEASURED_CLEARANCE] = {"clearance_nm", "nm", false, {true, false, true}},
    [PK_MEASURED_LONG] = {"long_nm", "nm", false, {true, false, true}},
    [PK_MEASURED_SHORT] = {"short_nm", "nm", false, {true, false, true}},
    [PK_MEASURED_EDGE_DRIFT] = {"edge_drift_nm_per_k", "nm/K", false, {true, false, true}},
    [PK_MEASURED_BLOCH_INDEX] = {"bloch_index", "", true, {true, false, true}},
    [PK_MEASURED_GROUP_INDEX] = {"group_index", "", true, {true, true, true}},
    [PK_MEASURED_DISPERSION] = {"dispersion", "ps/(nm km)", true, {true, false, true}},
    [PK_MEASURED_INDEX] = {"index", "", true, {false, true, false}},
    [PK_MEASURED_INDEX_RATE] = {"dn_dt_per_k", "1/K", true, {true, true, true}},
    [PK_MEASURED_DRIFT] = {"drift_pm_per_k", "pm/K", true, {true, true, true}},
};

static const char *const STRUCTURES[] = {"cell", "section", "channel"};

const char *pk_measured_name(pk_measured what) {
  return KINDS[what].name;
}

const char *pk_measured_unit(pk_measured what) {
  return KINDS[what].unit;
}

bool pk_measured_at_wavelength(pk_measured what) {
  return KINDS[what].at_wavelength;
}

const char *pk_family_name(pk_family family) {
  static const char *const names[] = {"ey", "hy", "te-like", "tm-like"};
  return names[family];
}

static bool has_structure(const pk_problem *problem, pk_structure structure) {
  switch (structure) {
    case PK_STRUCTURE_CELL: return problem->has_cell;
    case PK_STRUCTURE_SECTION: return problem->section.given;
    case PK_STRUCTURE_CHANNEL: return problem->channel.given;
  }
  return false;
}

/* Structures by preference. */
static const pk_structure ORDER[] = {PK_STRUCTURE_CELL, PK_STRUCTURE_CHANNEL, PK_STRUCTURE_SECTION};
enum { STRUCTURE_COUNT = 3 };

static picket_status fail_structure(const pk_problem *problem, pk_measured what, pk_place place) {
  char needs[60] = "";
  for (int i = 0; i < STRUCTURE_COUNT; i++) {
    if (KINDS[what].of[ORDER[i]]) {
      size_t used = strlen(needs);
      snprintf(needs + used, sizeof needs - used, "%s%s", used ? " or " : "", STRUCTURES[ORDER[i]]);
    }
  }
  return pk_fail_at(problem->context, PICKET_ERROR_INPUT, place,
                    "the quantity %s needs a %s in the file, which has none of it",
                    KINDS[what].name, needs);
}

picket_status pk_question_structure(const pk_problem *problem, pk_measured what, const char *path,
                                    pk_place place, pk_structure *out) {
  for (int i = 0; path && i < STRUCTURE_COUNT; i++) {
    size_t length = strlen(STRUCTURES[ORDER[i]]);
    bool named = strncmp(path, STRUCTURES[ORDER[i]], length) == 0 && path[length] == '.';
    if (named && KINDS[what].of[ORDER[i]] && has_structure(problem, ORDER[i])) {
      *out = ORDER[i];
      return PICKET_OK;
    }
  }
  for (int i = 0; i < STRUCTURE_COUNT; i++) {
    if (KINDS[what].of[ORDER[i]] && has_structure(problem, ORDER[i])) {
      *out = ORDER[i];
      return PICKET_OK;
    }
  }
  return fail_structure(problem, what, place);
}

int pk_question_families(const pk_problem *problem, pk_structure structure, bool given,
                         const bool wanted[2], pk_family out[2]) {
  const bool *light = problem->light.wanted;
  bool by_light = structure == PK_STRUCTURE_CHANNEL && !given;
  int count = 0;
  if (structure == PK_STRUCTURE_CELL) {
    for (int p = 0; p < 2; p++) {
      if (light[p]) {
        out[count++] = p == PK_EY ? PK_FAMILY_EY : PK_FAMILY_HY;
      }
    }
    return count;
  }
  if (by_light ? light[PK_HY] : wanted[0]) {
    out[count++] = PK_FAMILY_TE_LIKE;
  }
  if (by_light ? light[PK_EY] : wanted[1]) {
    out[count++] = PK_FAMILY_TM_LIKE;
  }
  return count;
}

void pk_lit_make(const pk_problem *problem, double wavelength_um, int polarization, pk_lit *out) {
  out->problem = *problem;
  out->wavelength_um = wavelength_um;
  if (wavelength_um > 0) {
    out->problem.light.count = 1;
    out->problem.light.wavelength_um = &out->wavelength_um;
  }
  for (int p = 0; polarization >= 0 && p < 2; p++) {
    out->problem.light.wanted[p] = p == polarization;
  }
}

void pk_measurement_refuse(pk_measurement *m, const char *format, ...) {
  va_list arguments;
  va_start(arguments, format);
  vsnprintf(m->reason, sizeof m->reason, format, arguments);
  va_end(arguments);
  m->q = (picket_quantity){NAN, NAN, m->reason};
  m->reached = false;
}

void pk_measurement_take(pk_measurement *m, picket_quantity q, double factor, double scale,
                         double accuracy) {
  m->q = (picket_quantity){factor * q.value, fabs(factor) * q.uncertainty, NULL};
  m->scale = scale;
  m->reached = q.uncertainty * fabs(factor) <= 1.01 * accuracy * scale;
  m->reason[0] = '\0';
  if (!isfinite(q.value) || !isfinite(q.uncertainty)) {
    snprintf(m->reason, sizeof m->reason, "%s", q.note ? q.note : "the mode was lost");
    m->q.note = m->reason;
  }
}

picket_status pk_measurement_outcome(picket_context *context, picket_status status,
                                     pk_measurement *m) {
  bool outcome = status == PICKET_ERROR_RANGE || status == PICKET_ERROR_NUMERIC ||
                 status == PICKET_ERROR_NO_MODE;
  if (!outcome) {
    return status;
  }
  pk_measurement_refuse(m, "%s", picket_context_message(context));
  pk_message_clear(context);
  return PICKET_OK;
}

picket_status pk_measure_largest_rate(const pk_problem *problem, double wavelength_um,
                                      double *rate) {
  *rate = 0;
  for (int m = 0; m < pk_materials_count(problem->materials); m++) {
    pk_medium medium;
    picket_status status =
        pk_materials_at(problem->materials, m, wavelength_um, problem->temperature_c, &medium);
    if (status == PICKET_OK) {
      *rate = fmax(*rate, cabs(medium.temperature_slope / (2 * csqrt(medium.permittivity))));
    } else if (status == PICKET_ERROR_RANGE || status == PICKET_ERROR_NO_MODE) {
      pk_message_clear(problem->context); /* one that the structure may not use */
    } else {
      return status;
    }
  }
  return PICKET_OK;
}

static picket_status measure(const pk_problem *problem, const pk_question *question,
                             const picket_options *options, pk_measure_memory *memory,
                             pk_measurement *out) {
  if (question->structure == PK_STRUCTURE_SECTION) {
    return pk_measure_section(problem, question, options, memory, out);
  }
  bool rate = question->what == PK_MEASURED_EDGE_DRIFT ||
              question->what == PK_MEASURED_INDEX_RATE || question->what == PK_MEASURED_DRIFT;
  if (question->structure == PK_STRUCTURE_CHANNEL && rate) {
    return pk_measure_channel_rate(problem, question, options, memory, out);
  }
  return pk_measured_at_wavelength(question->what)
             ? pk_measure_bloch(problem, question, options, memory, out)
             : pk_measure_edges(problem, question, options, out);
}

/* A value farther off than what is due is one of another mode. */
static void check_expected(const pk_measure_memory *memory, pk_measurement *m) {
  if (memory->reach > 0 && fabs(m->q.value - memory->expected) > memory->reach) {
    pk_measurement_refuse(m, "the value jumps to %.8g where %.8g is due: another mode", m->q.value,
                          memory->expected);
  }
}

picket_status pk_measure(const pk_problem *problem, const pk_question *question,
                         const picket_options *options, pk_measure_memory *memory,
                         pk_measurement *out) {
  pk_measure_memory own = {0}, *used = memory ? memory : &own, kept = *used;
  picket_options chosen = *options;
  chosen.count = 0; /* of orders or modes: the measurement asks for what it needs */
  chosen.jobs = 1;
  *out = (pk_measurement){.q = {NAN, NAN, NULL}, .scale = NAN, .limit = NAN};
  picket_status status = measure(problem, question, &chosen, used, out);
  status = pk_measurement_outcome(problem->context, status, out);
  if (status == PICKET_OK && isfinite(out->q.value)) {
    check_expected(used, out);
  }
  if (status == PICKET_OK && isfinite(out->q.value)) {
    used->known = true;
  } else {
    *used = kept;
  }
  if (out->reason[0] != '\0') { /* the struct may have been a copy while it was filled */
    out->q.note = out->reason;
  }
  return status;
}
