/* What was understood of a problem, with values that cost no grid: indices at the ends of the
 * operating band, the duty of the cell, light lines at the zone edge, the estimated stop band, the
 * number of modes of the slab.
 *
 * Duty is the share of the pitch that is not cladding, along the first of these lines that is
 * segmented: the axis x = 0, the middle of the shapes, the middles between neighbouring edges.
 */
#include <complex.h>
#include <math.h>

#include "base/memory.h"
#include "study/estimate.h"
#include "study/study.h"
#include "study/summary_list.h"

enum {
  FIRST_INTERVALS = 16,  /* of a profile; doubled until it fits */
  MOST_INTERVALS = 65536 /* more than the shapes of a file can make */
};
static const double NM_PER_UM = 1000;

static const char *const LATERAL[] = {
    [PK_LATERAL_OPEN] = "open",         [PK_LATERAL_PERIODIC] = "periodic",
    [PK_LATERAL_UNIFORM] = "uniform",   [PK_LATERAL_ELECTRIC] = "electric",
    [PK_LATERAL_MAGNETIC] = "magnetic",
};

static void add_length(pk_summary_list *list, const char *block, const char *entry,
                       const char *what, double um) {
  pk_summary_number(list, block, entry, what, NM_PER_UM * um, "nm");
}

static void add_light(pk_summary_list *list, const pk_light *light) {
  if (light->count > 0) {
    add_length(list, "light", NULL, "from", light->wavelength_um[0]);
    add_length(list, "light", NULL, "to", light->wavelength_um[light->count - 1]);
    pk_summary_number(list, "light", NULL, "points", light->count, "");
  }
  pk_summary_text(list, "light", NULL, "polarization",
                  !light->wanted[PK_EY]   ? "hy"
                  : !light->wanted[PK_HY] ? "ey"
                                          : "both");
}

static void add_index(pk_summary_list *list, const pk_problem *problem, int material,
                      double wavelength_um, const char *index, const char *extinction) {
  const char *name = pk_materials_name(problem->materials, material);
  pk_medium medium = {0};
  if (list->status == PICKET_OK) {
    list->status = pk_materials_at(problem->materials, material, wavelength_um,
                                   problem->temperature_c, &medium);
  }
  double complex n = csqrt(medium.permittivity);
  pk_summary_number(list, "materials", name, index, creal(n), "");
  if (cimag(n) != 0) {
    pk_summary_number(list, "materials", name, extinction, cimag(n), "");
  }
}

static void add_materials(pk_summary_list *list, const pk_problem *problem) {
  const pk_light *light = &problem->light;
  for (int m = 0; m < pk_materials_count(problem->materials); m++) {
    pk_summary_text(list, "materials", pk_materials_name(problem->materials, m), "source",
                    pk_materials_source(problem->materials, m));
    if (light->count > 0) {
      add_index(list, problem, m, light->wavelength_um[0], "index_from", "extinction_from");
      add_index(list, problem, m, light->wavelength_um[light->count - 1], "index_to",
                "extinction_to");
    }
  }
}

/* The share of the pitch at x that is not cladding. */
static picket_status share_at(const pk_problem *problem, double x, double *share) {
  picket_context *context = problem->context;
  for (int capacity = FIRST_INTERVALS;; capacity *= 2) {
    int count = 0;
    double sum = 0;
    double *boundary = PK_NEW(context, capacity + 1, double);
    int *material = boundary ? PK_NEW(context, capacity, int) : NULL;
    picket_status status = material ? pk_geometry_profile(problem->cell.geometry, x, capacity,
                                                          boundary, material, &count)
                                    : PICKET_ERROR_MEMORY;
    for (int i = 0; i < count && status == PICKET_OK; i++) {
      sum += material[i] != problem->cell.cladding ? boundary[i + 1] - boundary[i] : 0;
    }
    pk_free(context, material);
    pk_free(context, boundary);
    if (status == PICKET_OK) {
      *share = sum / problem->cell.pitch_um;
    }
    if (status != PICKET_ERROR_UNSUPPORTED || capacity >= MOST_INTERVALS) {
      return status;
    }
    pk_message_clear(context);
  }
}

/* Takes the share at x unless a segmented line has been found already. */
static picket_status try_line(const pk_problem *problem, double x, double *duty) {
  double share = 0;
  bool found = *duty > 0 && *duty < 1;
  picket_status status = found ? PICKET_OK : share_at(problem, x, &share);
  if (status == PICKET_OK && !found && share > 0 && (share < 1 || *duty == 0)) {
    *duty = share;
  }
  return status;
}

static picket_status find_duty(const pk_problem *problem, double *duty) {
  double low = 0;
  double high = 0;
  double *lines = NULL;
  int count = 0;
  *duty = 0;
  picket_status status = pk_geometry_lines(problem->cell.geometry, PK_V, &lines, &count);
  if (status == PICKET_OK) {
    status = try_line(problem, 0, duty);
  }
  if (status == PICKET_OK && pk_geometry_extent(problem->cell.geometry, PK_V, &low, &high)) {
    status = try_line(problem, low + (high - low) / 2, duty);
  }
  for (int i = 0; i + 1 < count && status == PICKET_OK; i++) {
    status = try_line(problem, lines[i] + (lines[i + 1] - lines[i]) / 2, duty);
  }
  pk_free(problem->context, lines);
  return status;
}

static void add_light_line(pk_summary_list *list, const pk_problem *problem, int material) {
  double um = NAN;
  if (list->status == PICKET_OK) {
    list->status = pk_light_line(problem, material, &um);
  }
  const char *name = pk_materials_name(problem->materials, material);
  if (isnan(um)) {
    pk_summary_text(list, "cell.light_line", NULL, name, "outside the range of the material");
  } else {
    add_length(list, "cell.light_line", NULL, name, um);
  }
}

/* Light lines of the open sides. */
static void add_light_lines(pk_summary_list *list, const pk_problem *problem) {
  int low = 0;
  int high = 0;
  if (problem->cell.lateral != PK_LATERAL_OPEN ||
      !pk_geometry_side_media(problem->cell.geometry, PK_V, &low, &high)) {
    return;
  }
  add_light_line(list, problem, low);
  if (high != low) {
    add_light_line(list, problem, high);
  }
}

static void add_estimate(pk_summary_list *list, const pk_problem *problem, pk_polarization p) {
  const char *word = p == PK_EY ? "ey" : "hy";
  picket_edge_estimate estimate = {0};
  if (list->status == PICKET_OK) {
    list->status = pk_estimate(problem, p, &estimate);
  }
  if (!estimate.method) {
    return;
  }
  pk_summary_text(list, "cell.estimate", word, "method", estimate.method);
  if (isnan(estimate.centre_um)) {
    pk_summary_text(list, "cell.estimate", word, "centre", "none where the materials are known");
  } else {
    add_length(list, "cell.estimate", word, "centre", estimate.centre_um);
  }
}

static void add_cell(pk_summary_list *list, const pk_problem *problem) {
  const pk_cell *cell = &problem->cell;
  double duty = 0;
  add_length(list, "cell", NULL, "pitch", cell->pitch_um);
  pk_summary_text(list, "cell", NULL, "cladding",
                  pk_materials_name(problem->materials, cell->cladding));
  pk_summary_text(list, "cell", NULL, "lateral", LATERAL[cell->lateral]);
  if (cell->span_um > 0) {
    add_length(list, "cell", NULL, "lateral_span", cell->span_um);
  }
  if (cell->shift > 0) {
    pk_summary_number(list, "cell", NULL, "lateral_shift", cell->shift, "");
  }
  if (list->status == PICKET_OK) {
    list->status = find_duty(problem, &duty);
  }
  pk_summary_number(list, "cell", NULL, "duty", duty, "");
  if (isfinite(problem->smallest_um)) {
    add_length(list, "cell", NULL, "smallest_feature", problem->smallest_um);
  }
  add_light_lines(list, problem);
  for (int p = PK_EY; p <= PK_HY; p++) {
    if (problem->light.wanted[p]) {
      add_estimate(list, problem, (pk_polarization)p);
    }
  }
}

static picket_status count_modes(const pk_problem *problem, pk_slab_film *films,
                                 pk_slab_polarization polarization, double wavelength_um,
                                 int *count) {
  pk_slab slab;
  pk_slab_mode mode;
  picket_status status = pk_materials_slab_at(problem->materials, &problem->slab.recipe,
                                              wavelength_um, problem->temperature_c, &slab, films);
  if (status == PICKET_OK) {
    status = pk_slab_modes(problem->context, &slab, polarization, wavelength_um, 1, &mode, count);
  }
  return status;
}

static void add_slab(pk_summary_list *list, const pk_problem *problem) {
  static const char *const words[] = {[PK_SLAB_TE] = "te", [PK_SLAB_TM] = "tm"};
  static const char *const ends[] = {"modes_from", "modes_to"};
  const pk_light *light = &problem->light;
  const int film_count = problem->slab.recipe.film_count;
  pk_summary_number(list, "slab", NULL, "films", film_count, "");
  if (light->count == 0 || list->status != PICKET_OK) {
    return;
  }
  pk_slab_film *films = PK_NEW(problem->context, film_count, pk_slab_film);
  list->status = films ? PICKET_OK : PICKET_ERROR_MEMORY;
  for (int i = 0; i < 4; i++) {
    int p = i / 2;
    int count = 0;
    if (problem->slab.wanted[p] && list->status == PICKET_OK) {
      double um = light->wavelength_um[i % 2 == 0 ? 0 : light->count - 1];
      list->status = count_modes(problem, films, (pk_slab_polarization)p, um, &count);
      pk_summary_number(list, "slab", words[p], ends[i % 2], count, "");
    }
  }
  pk_free(problem->context, films);
}

static picket_status fill(const pk_problem *problem, picket_result *result) {
  pk_summary_list list = {result, 0, PICKET_OK};
  pk_summary_number(&list, "problem", NULL, "temperature", problem->temperature_c, "°C");
  add_light(&list, &problem->light);
  add_materials(&list, problem);
  if (problem->has_cell) {
    add_cell(&list, problem);
  }
  if (problem->channel.given) {
    pk_summary_channel(&list, problem);
  }
  if (problem->slab.given) {
    add_slab(&list, problem);
  }
  return list.status == PICKET_OK ? pk_summary_write_lines(result) : list.status;
}

picket_status pk_study_summary(const pk_problem *problem, picket_result **out) {
  picket_result *result = NULL;
  picket_status status =
      pk_result_create(problem->context, PK_RESULT_SUMMARY, problem->name, NAN, &result);
  if (status == PICKET_OK) {
    status = fill(problem, result);
  }
  if (status != PICKET_OK) {
    pk_result_free(result);
    return status;
  }
  *out = result;
  return PICKET_OK;
}
