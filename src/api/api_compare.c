/* See picket/edges.h: a channel beside its two-dimensional models.
 *
 * The row of the homogenised section has no stop band of its own; by its index n(λ) one would
 * expect the edge where λ = 2Λ n(λ). That is found by Newton steps, whose slope comes from the
 * group index: dn/dλ = (n - n_g)/λ. */
#include <math.h>
#include <string.h>

#include "api/border.h"
#include "api/channel_models.h"
#include "api/problem_private.h"
#include "base/memory.h"
#include "io/document_text.h"
#include "io/read.h"
#include "study/channel_edges.h"
#include "study/edges.h"
#include "study/modes.h"
#include "study/study.h"
#include "study/sweep.h"

enum { NEWTON_STEPS = 8, SECTION_MODES = 4, MODELS = 2 };
static const double SETTLED = 1e-7;

static const char METHOD_CELL[] = "two-dimensional cell with slab indices, seen from above";
static const char METHOD_LAYERED[] =
    "section of the homogenised row (second-order Rytov average), wavelength = 2 pitch index";

typedef struct work {
  picket_context *context;
  const picket_problem *owner;
  const pk_problem *problem;
  const picket_options *options;
  picket_result *result;
} work;

/* The problem as a model of it, for a polarization; `scratch` takes what falls short. */
typedef picket_status model_builder(const work *w, pk_polarization polarization,
                                    pk_document *document);

static picket_status build_cell(const work *w, pk_polarization polarization,
                                pk_document *document) {
  return pk_channel_model_cell(w->problem, polarization, document);
}

static picket_status build_section(const work *w, pk_polarization polarization,
                                   pk_document *document) {
  (void)polarization;
  return pk_channel_model_section(w->problem, document);
}

/* The problem with a model in it, from the text of the whole. */
static picket_status open_model(const work *w, pk_polarization polarization, model_builder *build,
                                pk_problem **out) {
  char *text = NULL;
  pk_document *document = NULL;
  const pk_node *root = pk_document_root(w->owner->document);
  picket_status status = pk_document_text(w->owner->document, root, &text);
  if (status == PICKET_OK) {
    status = pk_document_read_text(w->context, text, strlen(text), "model", &document);
  }
  if (status == PICKET_OK) {
    status = build(w, polarization, document);
  }
  if (status == PICKET_OK) {
    status = pk_problem_read(w->context, document, out);
  }
  pk_document_free(document);
  pk_free(w->context, text);
  return status;
}

static picket_status edge_of_cell(const pk_problem *model, pk_polarization polarization,
                                  const picket_options *options, double start_um,
                                  picket_result *scratch, picket_quantity *edge) {
  (void)start_um;
  picket_edges_answer answer = {.bands = NULL};
  picket_status status = pk_edges_of(model, polarization, options, &answer, scratch);
  if (status == PICKET_OK) {
    *edge = answer.bands[0].long_um;
  }
  pk_free(model->context, (void *)answer.bands);
  return status;
}

/* The fundamental mode of the polarization at a wavelength; value NaN if there is none. */
static picket_status mode_of_section(const pk_problem *model, pk_polarization polarization,
                                     const picket_options *options, double wavelength_um,
                                     picket_result *scratch, picket_quantity *index,
                                     picket_quantity *group) {
  picket_options chosen = *options;
  picket_modes_point point = {.wavelength_um = wavelength_um};
  chosen.count = SECTION_MODES;
  picket_status status = pk_modes_point(model, wavelength_um, &chosen, &point, scratch);
  *index = *group = (picket_quantity){NAN, NAN, "the homogenised section guides no such mode"};
  for (int i = 0; status == PICKET_OK && i < point.mode_count && isnan(index->value); i++) {
    if ((point.modes[i].ex_share > 0.5) == (polarization == PK_HY)) {
      *index = point.modes[i].index;
      *group = point.modes[i].group_index;
    }
  }
  pk_modes_point_clear(model->context, &point);
  return status;
}

static picket_status edge_of_section(const pk_problem *model, pk_polarization polarization,
                                     const picket_options *options, double start_um,
                                     picket_result *scratch, picket_quantity *edge) {
  double wavelength = start_um, step = INFINITY, pitch = model->channel.pitch_um;
  picket_quantity index = {NAN, NAN, NULL}, group = index;
  picket_status status = PICKET_OK;
  for (int n = 0; n < NEWTON_STEPS && status == PICKET_OK && fabs(step) > SETTLED; n++) {
    status = mode_of_section(model, polarization, options, wavelength, scratch, &index, &group);
    double slope = 2 * pitch * (index.value - group.value) / wavelength - 1;
    step = -(2 * pitch * index.value - wavelength) / slope;
    wavelength += step;
    *edge = (picket_quantity){wavelength, 2 * pitch * index.uncertainty / fabs(slope), index.note};
    step = isnan(step) ? 0 : step / wavelength;
  }
  return status;
}

static const struct {
  const char *method;
  model_builder *build;
  picket_status (*edge)(const pk_problem *, pk_polarization, const picket_options *, double,
                        picket_result *, picket_quantity *);
} MODEL[MODELS] = {{METHOD_CELL, build_cell, edge_of_cell},
                   {METHOD_LAYERED, build_section, edge_of_section}};

/* A model that cannot be built or solved is a line with the reason; the rest stands. */
static picket_status compare_one(const work *w, int answer, int m) {
  const picket_edges_answer *direct = &w->result->edges[answer];
  const picket_quantity *edge = &direct->bands[0].long_um;
  pk_polarization polarization = direct->polarization == PICKET_TE_LIKE ? PK_HY : PK_EY;
  picket_edge_comparison *c = &w->result->comparison[w->result->comparison_count++];
  pk_problem *model = NULL;
  picket_result *scratch = NULL;
  *c = (picket_edge_comparison){.answer = answer, .method = MODEL[m].method};
  picket_status status =
      pk_result_create(w->context, PK_RESULT_EDGES, "", w->options->accuracy, &scratch);
  if (status == PICKET_OK) {
    status = open_model(w, polarization, MODEL[m].build, &model);
  }
  if (status == PICKET_OK) {
    status = MODEL[m].edge(model, polarization, w->options, edge->value, scratch, &c->long_um);
  }
  if (status == PICKET_OK) {
    c->long_um.note = pk_result_text(w->result, c->long_um.note ? c->long_um.note : "");
    c->error_um = c->long_um;
    c->error_um.value -= edge->value;
    c->error_um.uncertainty += edge->uncertainty;
  } else if (pk_sweep_is_of_a_piece(status)) {
    const char *why = pk_result_text(w->result, picket_context_message(w->context));
    pk_message_clear(w->context);
    c->long_um = c->error_um = (picket_quantity){NAN, NAN, why};
    status = why ? PICKET_OK : PICKET_ERROR_MEMORY;
  }
  pk_problem_free(model);
  pk_result_free(scratch);
  return status;
}

static picket_status compare(picket_problem *problem, const picket_options *options,
                             picket_result **out) {
  picket_options chosen;
  work w = {.context = problem->context, .owner = problem, .options = &chosen};
  picket_status status = pk_border_prepare(problem, options, out, &chosen, &w.problem);
  if (status == PICKET_OK && !pk_asks_channel(w.problem)) {
    status = pk_fail(w.context, PICKET_ERROR_INPUT,
                     "a comparison is of a channel with its two-dimensional models; the problem "
                     "has %s",
                     w.problem->has_cell ? "a cell" : "no channel");
  }
  if (status == PICKET_OK) {
    status = pk_study_edges(w.problem, &chosen, &w.result);
  }
  if (status != PICKET_OK) {
    return status;
  }
  w.result->comparison = PK_NEW(w.context, MODELS * w.result->count, picket_edge_comparison);
  status = w.result->comparison ? PICKET_OK : PICKET_ERROR_MEMORY;
  for (int i = 0; status == PICKET_OK && i < MODELS * w.result->count; i++) {
    status = compare_one(&w, i / MODELS, i % MODELS);
  }
  if (status != PICKET_OK) {
    pk_result_free(w.result);
    return status;
  }
  *out = w.result;
  return PICKET_OK;
}

picket_status picket_edges_compare(picket_problem *problem, const picket_options *options,
                                   picket_result **out) {
  if (!problem) {
    return PICKET_ERROR_ARGUMENT;
  }
  picket_status status = pk_border_enter(problem->context);
  return status == PICKET_OK ? pk_border_leave(problem->context, compare(problem, options, out))
                             : status;
}

int picket_edges_comparison_count(const picket_result *result) {
  return pk_border_count(result, PK_RESULT_EDGES) > 0 ? result->comparison_count : 0;
}

picket_status picket_edges_comparison_get(const picket_result *result, int i,
                                          picket_edge_comparison *out) {
  if (i < 0 || i >= picket_edges_comparison_count(result) || !out) {
    return PICKET_ERROR_ARGUMENT;
  }
  *out = result->comparison[i];
  return PICKET_OK;
}
