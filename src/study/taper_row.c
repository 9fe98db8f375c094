/* A row from its teeth: places along it, what neighbours have in common, and what is wrong where.
 * See picket/taper.h for the formulas. */
#include <math.h>

#include "base/memory.h"
#include "study/taper.h"

static const double SLACK = 1e-9; /* rounding of a length */

typedef struct row {
  const pk_problem *problem;
  picket_context *context;
  const pk_taper_cell *cells;
  int stride;
  picket_result *result; /* for texts */
  picket_taper_tooth *teeth;
} row;

static const char NO_NEXT[] = "the last tooth has no next one";
static const char NO_FIBRE[] = "the file names no fibre";
static const char NOTHING_ACROSS[] = "nothing varies across the guide";
static const char REPEATED_ACROSS[] = "the cell is repeated across the guide";
static const char NO_POWER[] = "the plane between the teeth carries no power";
static const char OTHER_WIDTH[] = "the two cells are not of the same lateral span";
static const char LACKING[] = "an overlap of the row is missing";

static const pk_taper_cell *cell_of(const row *r, int tooth) {
  return &r->cells[tooth * r->stride];
}

void pk_taper_answer_clear(picket_context *context, picket_taper_answer *answer) {
  picket_taper_tooth *teeth = (picket_taper_tooth *)answer->teeth;
  for (int i = 0; teeth && i < answer->tooth_count; i++) {
    pk_free(context, (void *)teeth[i].values);
  }
  pk_free(context, teeth);
  pk_free(context, (void *)answer->changes);
  answer->teeth = NULL;
  answer->changes = NULL;
  answer->tooth_count = answer->change_count = 0;
}

static picket_status take_changes(const row *r, picket_taper_answer *out) {
  const pk_taper_block *taper = &r->problem->taper;
  picket_taper_change *changes = PK_NEW(r->context, taper->count, picket_taper_change);
  if (!changes) {
    return PICKET_ERROR_MEMORY;
  }
  out->changes = changes;
  out->change_count = taper->count;
  for (int i = 0; i < taper->count; i++) {
    const pk_taper_change *from = &taper->change[i];
    changes[i] = (picket_taper_change){pk_result_text(r->result, from->vary), from->from, from->to,
                                       from->law, from->exponent};
    if (!changes[i].vary) {
      return PICKET_ERROR_MEMORY;
    }
  }
  return PICKET_OK;
}

/* --- One tooth ---------------------------------------------------------------------------------
 */

/* Why there is no number about what lies across the guide; null if there may be one. */
static const char *no_width(const row *r, const pk_taper_cell *cell) {
  if (cell->why) {
    return cell->why;
  }
  switch (r->problem->cell.lateral) {
    case PK_LATERAL_UNIFORM: return NOTHING_ACROSS;
    case PK_LATERAL_PERIODIC: return REPEATED_ACROSS;
    default: return NULL;
  }
}

/* E and h of a mode differ in shape, and the formula, which leaves out waves that go back, can
 * exceed 1: a share does not, and what was cut off is part of its bar. */
static picket_quantity cut(picket_quantity share) {
  double excess = share.value - 1;
  return excess > 0 ? (picket_quantity){1, share.uncertainty + excess, NULL} : share;
}

static void take_width(const row *r, const pk_taper_cell *cell, picket_taper_tooth *tooth) {
  const char *why = no_width(r, cell);
  double fibre = r->problem->taper.fibre_um, size[PK_TAPER_GRIDS], share[PK_TAPER_GRIDS];
  tooth->mode_size_um = (picket_quantity){NAN, NAN, why};
  tooth->fibre_share = (picket_quantity){NAN, NAN, fibre > 0 ? why : NO_FIBRE};
  if (why) {
    return;
  }
  for (int g = 0; g < PK_TAPER_GRIDS; g++) {
    double centroid;
    pk_plane_size(&cell->plane[g], &centroid, &size[g]);
    share[g] = NAN;
    if (fibre > 0) {
      pk_plane_beam(&cell->plane[g], centroid, fibre, &share[g]);
    }
  }
  tooth->mode_size_um = pk_taper_pair(size[0], size[1], NO_POWER);
  if (fibre > 0) {
    tooth->fibre_share = cut(pk_taper_pair(share[0], share[1], NO_POWER));
  }
}

/* Where the edges of a first stop band coincide, nothing varies along the guide: folded waves that
 * a period would radiate are not there. */
static int warnings_of(const pk_taper_cell *cell) {
  bool stopped = cell->regime == PICKET_REGIME_STOP_BAND;
  bool past = !stopped && !cell->no_band && cell->clearance_um.value < 0;
  bool radiating = cell->regime == PICKET_REGIME_RADIATING && !cell->no_band;
  return (stopped ? PICKET_TAPER_STOP_BAND : 0) | (past ? PICKET_TAPER_PAST_BAND : 0) |
         (radiating ? PICKET_TAPER_RADIATING : 0) |
         (cell->respects ? 0 : PICKET_TAPER_SMALL_FEATURE);
}

/* A note of a quantity of the cell belongs to the result already. */
static picket_status take_tooth(const row *r, int i, double from_um) {
  const pk_taper_block *taper = &r->problem->taper;
  const pk_taper_cell *cell = cell_of(r, i);
  double *values = PK_NEW(r->context, taper->count, double);
  if (!values) {
    return PICKET_ERROR_MEMORY;
  }
  for (int k = 0; k < taper->count; k++) {
    values[k] = pk_taper_value(&taper->change[k], i, taper->teeth);
  }
  picket_taper_tooth *tooth = &r->teeth[i];
  *tooth = (picket_taper_tooth){.number = i + 1,
                                .at_um = from_um + 0.5 * cell->pitch_um,
                                .pitch_um = cell->pitch_um,
                                .value_count = taper->count,
                                .values = values,
                                .bloch_index = cell->bloch_index,
                                .group_index = cell->group_index,
                                .loss_db_per_cm = cell->loss_db_per_cm,
                                .clearance_um = cell->clearance_um,
                                .regime = cell->regime,
                                .overlap_next = {NAN, NAN, NO_NEXT},
                                .reflection_next = {NAN, NAN, NO_NEXT},
                                .next_index = cell->next_index,
                                .adiabatic = NAN,
                                .smallest_feature_um = cell->smallest_um,
                                .warnings = warnings_of(cell),
                                .note = cell->note,
                                .failed = cell->note != NULL};
  take_width(r, cell, tooth);
  return PICKET_OK;
}

/* --- Neighbours --------------------------------------------------------------------------------
 */

/* Between walls or in a lateral period two cells must be of one width. */
static bool fit(const row *r, const pk_plane *a, const pk_plane *b) {
  double width = a->x[a->count - 1] - a->x[0], other = b->x[b->count - 1] - b->x[0];
  return r->problem->cell.lateral == PK_LATERAL_OPEN || fabs(other - width) <= SLACK * width;
}

static picket_status take_overlap(const row *r, int i) {
  const pk_taper_cell *a = cell_of(r, i), *b = cell_of(r, i + 1);
  const char *why = a->why ? a->why : b->why;
  if (!why && !fit(r, &a->plane[0], &b->plane[0])) {
    why = OTHER_WIDTH;
  }
  pk_joint joint[PK_TAPER_GRIDS];
  picket_status status = PICKET_OK;
  r->teeth[i].overlap_next = r->teeth[i].reflection_next = (picket_quantity){NAN, NAN, why};
  for (int g = 0; !why && g < PK_TAPER_GRIDS && status == PICKET_OK; g++) {
    status = pk_plane_meet(r->context, &a->plane[g], &b->plane[g], &joint[g]);
  }
  if (!why && status == PICKET_OK) {
    r->teeth[i].overlap_next = pk_taper_pair(joint[0].share, joint[1].share, NO_POWER);
    r->teeth[i].reflection_next = pk_taper_pair(joint[0].reflection, joint[1].reflection, NO_POWER);
  }
  return status;
}

/* |dρ/dz| 2π / (ρ (β₁ - β₂)) between the middles of two teeth, with their means; ρ is half of the
 * size. A mode that is not above what it couples to has no beat length: nothing is slow enough. */
static void take_adiabatic(const row *r, int i) {
  picket_taper_tooth *a = &r->teeth[i], *b = &r->teeth[i + 1];
  double rho = 0.25 * (a->mode_size_um.value + b->mode_size_um.value);
  double change = 0.5 * fabs(b->mode_size_um.value - a->mode_size_um.value);
  double apart =
      0.5 * (a->bloch_index.value + b->bloch_index.value - a->next_index - b->next_index);
  double beat = r->problem->taper.at_um / apart;
  double slope = change / (b->at_um - a->at_um);
  if (!isfinite(slope) || !isfinite(rho) || !isfinite(beat)) {
    return;
  }
  if (apart <= 0) {
    a->warnings |= change > 0 ? PICKET_TAPER_ABRUPT : 0;
    return;
  }
  a->adiabatic = slope * beat / rho;
  a->warnings |= a->adiabatic >= 1 ? PICKET_TAPER_ABRUPT : 0;
}

/* The bars of the factors add as parts of themselves. */
static picket_quantity product_of(const row *r, int joints) {
  double value = 1, part = 0;
  for (int i = 0; i < joints; i++) {
    picket_quantity q = r->teeth[i].overlap_next;
    value *= q.value;
    part += q.uncertainty / q.value;
  }
  return isfinite(value) && isfinite(part) ? (picket_quantity){value, value * part, NULL}
                                           : (picket_quantity){NAN, NAN, LACKING};
}

picket_status pk_taper_row(const pk_problem *problem, const pk_taper_cell *cells, int stride,
                           picket_result *result, picket_taper_answer *out) {
  const pk_taper_block *taper = &problem->taper;
  row r = {problem, problem->context, cells, stride, result, NULL};
  *out = (picket_taper_answer){.polarization = cells[0].polarization,
                               .wavelength_um = taper->at_um,
                               .fibre_um = taper->fibre_um > 0 ? taper->fibre_um : NAN};
  picket_status status = take_changes(&r, out);
  if (status == PICKET_OK) {
    r.teeth = PK_NEW(problem->context, taper->teeth, picket_taper_tooth);
    status = r.teeth ? PICKET_OK : PICKET_ERROR_MEMORY;
    out->teeth = r.teeth;
  }
  for (int i = 0; i < taper->teeth && status == PICKET_OK; i++) {
    out->tooth_count = i + 1;
    status = take_tooth(&r, i, out->length_um);
    out->length_um += r.teeth[i].pitch_um;
  }
  for (int i = 0; i + 1 < taper->teeth && status == PICKET_OK; i++) {
    status = take_overlap(&r, i);
    take_adiabatic(&r, i);
  }
  if (status == PICKET_OK) {
    out->transmission = product_of(&r, taper->teeth - 1);
    out->fibre_share = r.teeth[taper->teeth - 1].fibre_share;
  }
  return status;
}
