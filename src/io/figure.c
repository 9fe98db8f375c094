/* See figure.h. */
#include "io/figure.h"

#include "base/memory.h"
#include "io/figure_script.h"

typedef picket_status (*drawer)(pk_figure *f);

static drawer drawer_of(const picket_result *result) {
  bool sweep = result->sweep_path != NULL;
  switch (result->kind) {
    case PK_RESULT_EDGES: return sweep ? NULL : pk_figure_edges;
    case PK_RESULT_BANDS: return pk_figure_bands;
    case PK_RESULT_INDEX: return sweep ? NULL : pk_figure_index;
    case PK_RESULT_MODES: return sweep ? NULL : pk_figure_modes;
    case PK_RESULT_SLAB: return sweep ? NULL : pk_figure_slab;
    case PK_RESULT_TAPER: return pk_figure_taper;
    case PK_RESULT_TOLERANCE: return pk_figure_tolerance;
    case PK_RESULT_SUMMARY: return pk_figure_problem;
    case PK_RESULT_AIM:
    case PK_RESULT_MATCH:
    case PK_RESULT_EDGE_DERIVATIVES:
    case PK_RESULT_INDEX_DERIVATIVES: break;
  }
  return NULL;
}

picket_status pk_figure_write(const picket_result *result, const pk_problem *problem,
                              const picket_figure_options *options, char **out) {
  pk_figure f = {.s = {.context = result->context, .status = PICKET_OK, .answer = -1},
                 .result = result,
                 .problem = problem,
                 .options = options};
  drawer draw = drawer_of(result);
  picket_status status =
      draw ? draw(&f)
           : pk_fail(result->context, PICKET_ERROR_UNSUPPORTED,
                     "figure: this version has no picture of %s",
                     result->sweep_path ? "a sweep of this question" : "an answer of this kind");
  status = status == PICKET_OK ? f.s.status : status;
  if (status != PICKET_OK) {
    pk_free(result->context, f.s.text);
    return status;
  }
  *out = f.s.text;
  return PICKET_OK;
}
