/* The first look at the stop band of a channel: see channel_edges.h.
 *
 * Where the band lies is not known beforehand, so the survey is first taken at a wavelength that is
 * a guess, λ = 2Λ√(n_top n_cut), and again at the long edge that was found there. */
#include <math.h>

#include "study/channel_edges.h"

static const double PI = 3.141592653589793238;

/* The coarse grid: 12 steps in the shortest wavelength across, four harmonics. */
enum { LOOK_MEMBER = 2, LOOK_HARMONICS = 1 };
static const double LOOK_REACH = 5;
static const double LOOK_ACCURACY = 1e-2;

void pk_channel_outlook_clear(pk_channel_outlook *look) {
  pk_channel_survey_clear(&look->survey);
}

/* A wavelength moved to where every material of the channel is known. */
static double into_range(const pk_problem *problem, double wavelength_um) {
  pk_material_range known =
      pk_materials_common_range(problem->materials, problem->channel.outline.used);
  return fmin(fmax(wavelength_um, known.shortest_um), known.longest_um);
}

static picket_status search(pk_channel_outlook *look, double index) {
  const pk_channel_survey *s = &look->survey;
  picket_context *context = s->problem->context;
  pk_axis x = {0}, y = {0};
  pk_channel_level level = {0};
  picket_status status =
      pk_channel_survey_lay(s, index, LOOK_REACH, true, LOOK_ACCURACY, PK_END_ZERO, &x, &y);
  if (status == PICKET_OK) {
    status = pk_channel_level_open(s, &x, &y, LOOK_MEMBER, LOOK_HARMONICS, s->section.k0, &level);
  }
  if (status == PICKET_OK) {
    status = pk_channel_pair_search(s, &level, LOOK_HARMONICS, look->light_line, &look->pair);
  }
  pk_channel_level_close(&level);
  pk_axis_clear(context, &x);
  pk_axis_clear(context, &y);
  return status;
}

static void take_light_line(pk_channel_outlook *look) {
  double k = PI / look->survey.problem->channel.pitch_um, cut = look->survey.section.cut;
  double top = look->survey.section.top;
  /* Between walls everything is confined; a look still ends somewhere. */
  look->light_line = cut > 0 ? k / cut : k * top;
}

/* Survey at a wavelength and search; sides that modes leak into are set apart if nothing is
 * confined else. */
static picket_status look_at(const pk_problem *problem, pk_polarization polarization,
                             double wavelength_um, double index, bool apart,
                             pk_channel_outlook *look) {
  pk_channel_outlook l = {.leaks = false};
  picket_status status = pk_channel_survey_take(problem, polarization, wavelength_um, &l.survey);
  if (status == PICKET_OK && apart) {
    status = pk_channel_survey_set_apart(&l.survey, &l.leaks);
  }
  if (status == PICKET_OK) {
    const pk_section_survey *s = &l.survey.section;
    take_light_line(&l);
    double usual = sqrt(s->top * fmax(s->cut, 1));
    if (s->top > s->cut) {
      status = search(&l, index > s->cut ? index : fmax(usual, 0.9 * s->cut + 0.1 * s->top));
    }
  }
  if (status != PICKET_OK) {
    pk_channel_outlook_clear(&l);
    return status;
  }
  *look = l;
  return PICKET_OK;
}

static picket_status guess(const pk_problem *problem, pk_polarization polarization, bool apart,
                           double *wavelength_um, double *index) {
  double pitch = problem->channel.pitch_um;
  pk_channel_survey s;
  picket_status status =
      pk_channel_survey_take(problem, polarization, into_range(problem, 4 * pitch), &s);
  bool done = false;
  if (status == PICKET_OK && apart) {
    status = pk_channel_survey_set_apart(&s, &done);
  }
  if (status == PICKET_OK) {
    *index = sqrt(s.section.top * fmax(s.section.cut, 1));
    *wavelength_um = into_range(problem, 2 * pitch * *index);
  }
  pk_channel_survey_clear(&s);
  return status;
}

/* The lowest index of the edges found: it reaches farthest. */
static void take_index(pk_channel_outlook *look) {
  double k = PI / look->survey.problem->channel.pitch_um;
  look->index = INFINITY;
  for (int e = 0; e < 2; e++) {
    look->index = look->pair.found[e] ? fmin(look->index, k / look->pair.k0[e]) : look->index;
  }
}

/* Twice: the second time at the wavelength found the first time. */
static picket_status look_twice(const pk_problem *problem, pk_polarization polarization, bool apart,
                                pk_channel_outlook *out) {
  double wavelength = NAN, index = NAN;
  picket_status status = guess(problem, polarization, apart, &wavelength, &index);
  if (status == PICKET_OK) {
    status = look_at(problem, polarization, wavelength, index, apart, out);
  }
  if (status != PICKET_OK || !out->pair.found[PK_LONG]) {
    return status;
  }
  take_index(out);
  pk_channel_outlook second;
  double found = into_range(problem, 2 * PI / out->pair.k0[PK_LONG]);
  status = look_at(problem, polarization, found, out->index, apart, &second);
  if (status != PICKET_OK) {
    pk_channel_outlook_clear(out);
    return status;
  }
  pk_channel_outlook_clear(out);
  *out = second;
  take_index(out);
  return PICKET_OK;
}

picket_status pk_channel_outlook_take(const pk_problem *problem, pk_polarization polarization,
                                      pk_channel_outlook *out) {
  pk_channel_outlook look = {0};
  picket_status status = look_twice(problem, polarization, false, &look);
  if (status == PICKET_OK && !look.pair.found[PK_LONG]) {
    pk_channel_outlook_clear(&look);
    status = look_twice(problem, polarization, true, &look);
  }
  if (status == PICKET_OK && !look.pair.found[PK_LONG]) {
    status = pk_fail(problem->context, PICKET_ERROR_NO_MODE,
                     "the channel confines no %s mode at the edge of the zone, k = π/pitch: its "
                     "sides reach an index of %.6g",
                     polarization == PK_HY ? "te-like" : "tm-like", look.survey.section.cut);
    pk_channel_outlook_clear(&look);
  }
  if (status == PICKET_OK) {
    *out = look;
  }
  return status;
}
