/* Measurements of a cell or a channel: edges, Bloch index and what follows from them. See
 * measure.h.
 *
 * Temperature: dn/dT is the analytic derivative of the Bloch index at a fixed frequency
 * (derivative.h), dλ/dT that of the edge. The frequency of a resonance of a fixed order keeps
 * n_B(λ, T)/λ, so with n_g = n_B - λ dn_B/dλ it moves by dλ/dT = λ (dn_B/dT)/n_g. */
#include <math.h>

#include "base/memory.h"
#include "study/channel_index.h"
#include "study/edges.h"
#include "study/index.h"
#include "study/measure_private.h"
#include "study/study.h"

static const double NM_PER_UM = 1e3, PM_PER_UM = 1e6;
static const double SPEED_OF_LIGHT = 299.792458; /* µm/ps */

/* Half of the span in which index models are differenced, K. They are smooth but for the break, and
 * known to rounding; a centre that had to move by this much changes dn/dT by 2e-5 of itself. */
static const double WARM_STEP_K = 0.005;

void pk_warm(const pk_problem *problem, double wavelength_um, int polarization, pk_warmed *out) {
  static const int AT[PK_NEIGHBOURS] = {-2, -1, 1, 2};
  double centre = problem->temperature_c, reach = 2 * WARM_STEP_K;
  /* 293 K itself belongs to the upper branch; the step back by rounding must not cross it. */
  if (centre >= PK_BREAK_C && centre - reach <= PK_BREAK_C) {
    centre = PK_BREAK_C + 1.01 * reach;
  } else if (centre < PK_BREAK_C && centre + reach >= PK_BREAK_C) {
    centre = PK_BREAK_C - 1.01 * reach;
  }
  *out = (pk_warmed){.variation = {.step = WARM_STEP_K}};
  pk_lit_make(problem, wavelength_um, polarization, &out->at);
  out->variation.problem = &out->at.problem;
  for (int n = 0; n < PK_NEIGHBOURS; n++) {
    pk_lit_make(problem, wavelength_um, polarization, &out->near[n]);
    out->near[n].problem.temperature_c = centre + AT[n] * WARM_STEP_K;
    out->variation.neighbour[n] = &out->near[n].problem;
  }
}

/* Te-like modes of a channel are what hy is of a cell seen from above (channel_level.h). */
static pk_polarization polarization_of(pk_family family) {
  return family == PK_FAMILY_HY || family == PK_FAMILY_TE_LIKE ? PK_HY : PK_EY;
}

static double pitch_of(const pk_problem *problem, pk_structure structure) {
  return structure == PK_STRUCTURE_CHANNEL ? problem->channel.pitch_um : problem->cell.pitch_um;
}

/* --- Edges -------------------------------------------------------------------------------------
 */

static picket_status edge_drift(const pk_problem *problem, const pk_question *question,
                                const picket_options *options, pk_measurement *out) {
  pk_warmed warmed;
  picket_result *result = NULL;
  pk_warm(problem, 0, (int)question->family, &warmed);
  double typical = 0, near_um = problem->light.count > 0 ? problem->light.wavelength_um[0] : 1.55;
  picket_status status = pk_measure_largest_rate(problem, near_um, &typical);
  /* An edge moves like a resonance, by less than λ (dn/dT)/n of the medium that moves most. */
  double scale = typical * near_um * NM_PER_UM / 2;
  warmed.variation.bar_wanted = options->accuracy * scale / NM_PER_UM;
  if (status == PICKET_OK) {
    status = pk_study_edge_derivatives(&warmed.variation, options, &result);
  }
  if (status == PICKET_OK) {
    pk_measurement_take(out, result->edge_derivatives[0].bands[0].long_um, NM_PER_UM, scale,
                        options->accuracy);
  }
  pk_result_free(result);
  return status;
}

picket_status pk_measure_edges(const pk_problem *problem, const pk_question *question,
                               const picket_options *options, pk_measurement *out) {
  if (question->what == PK_MEASURED_EDGE_DRIFT) {
    return edge_drift(problem, question, options, out);
  }
  picket_context *context = problem->context;
  picket_edges_answer answer = {.bands = NULL};
  picket_result *scratch = NULL;
  bool channel = question->structure == PK_STRUCTURE_CHANNEL;
  picket_status status =
      pk_result_create(context, PK_RESULT_EDGES, "", options->accuracy, &scratch);
  if (status == PICKET_OK) {
    status = (channel ? pk_channel_edges_of : pk_edges_of)(
        problem, polarization_of(question->family), options, &answer, scratch);
  }
  if (status == PICKET_OK) {
    const picket_stop_band *first = &answer.bands[0];
    picket_quantity q = question->what == PK_MEASURED_CLEARANCE ? answer.operating.clearance_um
                        : question->what == PK_MEASURED_LONG    ? first->long_um
                                                                : first->short_um;
    double edge =
        question->what == PK_MEASURED_SHORT ? first->short_um.value : first->long_um.value;
    pk_measurement_take(out, q, NM_PER_UM, NM_PER_UM * edge, options->accuracy);
  }
  pk_free(context, (void *)answer.bands);
  pk_result_free(scratch);
  return status;
}

/* --- Bloch modes ------------------------------------------------------------------------------
 */

/* Whether a mode is the one remembered. */
static bool is_known(const pk_measure_memory *memory, double pitch_um, double at_um,
                     const picket_bloch_mode *mode, int *zone, pk_measurement *out) {
  double halves = 2 * mode->bloch_index.value * pitch_um / at_um;
  *zone = (int)floor(halves);
  if (mode->regime == PICKET_REGIME_STOP_BAND) {
    pk_measurement_refuse(out, "%.10g nm lies inside a stop band", NM_PER_UM * at_um);
    return false;
  }
  if (memory->known && *zone != memory->zone) {
    pk_measurement_refuse(out,
                          "the mode lies on the other side of a stop band: %d half periods per "
                          "pitch instead of %d",
                          *zone, memory->zone);
    return false;
  }
  return true;
}

/* dn/dT at the wavelength. */
static picket_status index_rate(const pk_problem *problem, const pk_question *question,
                                const picket_options *options, double largest,
                                picket_quantity *rate, pk_measurement *out) {
  pk_warmed warmed;
  picket_result *result = NULL;
  pk_warm(problem, question->at_um, (int)question->family, &warmed);
  warmed.variation.bar_wanted = options->accuracy * largest / 2;
  picket_status status = pk_study_index_derivatives(&warmed.variation, options, &result);
  if (status == PICKET_OK) {
    *rate = result->index_derivatives[0].points[0].bloch_index;
    if (!isfinite(rate->value)) {
      pk_measurement_refuse(out, "%s", rate->note ? rate->note : "the mode was lost");
    }
  }
  pk_result_free(result);
  return status;
}

static picket_status take_rate(const pk_problem *problem, const pk_question *question,
                               const picket_options *options, const picket_bloch_mode *mode,
                               pk_measurement *out) {
  double largest = 0;
  picket_quantity rate = {NAN, NAN, NULL};
  picket_status status = pk_measure_largest_rate(problem, question->at_um, &largest);
  if (status == PICKET_OK) {
    status = index_rate(problem, question, options, largest, &rate, out);
  }
  if (status != PICKET_OK || !isfinite(rate.value)) {
    return status;
  }
  if (question->what == PK_MEASURED_INDEX_RATE) {
    pk_measurement_take(out, rate, 1, largest, options->accuracy);
    return PICKET_OK;
  }
  double factor = PM_PER_UM * question->at_um / mode->group_index.value;
  rate.uncertainty +=
      fabs(rate.value) * mode->group_index.uncertainty / fabs(mode->group_index.value);
  pk_measurement_take(out, rate, factor, largest * factor, options->accuracy);
  return PICKET_OK;
}

static picket_status take_mode(const pk_problem *problem, const pk_question *question,
                               const picket_options *options, const picket_bloch_mode *mode,
                               pk_measurement *out) {
  switch (question->what) {
    case PK_MEASURED_BLOCH_INDEX:
      pk_measurement_take(out, mode->bloch_index, 1, fabs(mode->bloch_index.value),
                          options->accuracy);
      break;
    case PK_MEASURED_GROUP_INDEX:
      pk_measurement_take(out, mode->group_index, 1, fabs(mode->group_index.value),
                          options->accuracy);
      break;
    case PK_MEASURED_DISPERSION: {
      /* D = (1/c) dn_g/dλ: of the size that n_g/λ gives; ps/µm² is 1e6 ps/(nm km). */
      double scale = 1e6 * mode->group_index.value / (SPEED_OF_LIGHT * question->at_um);
      pk_measurement_take(out, mode->dispersion_ps_per_nm_km, 1, fabs(scale), options->accuracy);
      break;
    }
    default: return take_rate(problem, question, options, mode, out);
  }
  return PICKET_OK;
}

picket_status pk_measure_bloch(const pk_problem *problem, const pk_question *question,
                               const picket_options *options, pk_measure_memory *memory,
                               pk_measurement *out) {
  picket_context *context = problem->context;
  picket_index_point point = {0};
  pk_profile *profile = NULL;
  picket_result *scratch = NULL;
  picket_status status =
      pk_result_create(context, PK_RESULT_INDEX, "", options->accuracy, &scratch);
  if (status == PICKET_OK) {
    bool channel = question->structure == PK_STRUCTURE_CHANNEL;
    status = (channel ? pk_channel_index_point : pk_index_point)(
        problem, polarization_of(question->family), question->at_um, options, &point, &profile,
        scratch);
  }
  int zone = 0;
  double pitch = pitch_of(problem, question->structure);
  if (status == PICKET_OK && point.mode_count == 0) {
    pk_measurement_refuse(out, "%s", point.note ? point.note : "there is no Bloch mode");
  } else if (status == PICKET_OK &&
             is_known(memory, pitch, question->at_um, &point.modes[0], &zone, out)) {
    memory->zone = zone;
    if (question->what == PK_MEASURED_BLOCH_INDEX) {
      out->limit = (zone + 1) * question->at_um / (2 * pitch);
    }
    status = take_mode(problem, question, options, &point.modes[0], out);
  }
  pk_index_point_clear(context, &point);
  pk_free(context, profile);
  pk_result_free(scratch);
  return status;
}
