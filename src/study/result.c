/* See result.h. */
#include "study/result.h"

#include <stdarg.h>
#include <stdio.h>

#include <string.h>

#include "base/memory.h"
#include "study/index.h"
#include "study/modes.h"
#include "study/slab_answer.h"
#include "study/taper.h"
#include "study/tolerance.h"

enum { FIRST_TEXTS = 16 };

picket_status pk_result_create(picket_context *context, pk_result_kind kind, const char *name,
                               double accuracy, picket_result **out) {
  picket_result *result = PK_NEW(context, 1, picket_result);
  if (!result) {
    return PICKET_ERROR_MEMORY;
  }
  result->context = pk_context_hold(context);
  result->kind = kind;
  result->accuracy = accuracy;
  result->complete = true;
  result->name = pk_text_copy(context, name);
  if (!result->name) {
    pk_result_free(result);
    return PICKET_ERROR_MEMORY;
  }
  *out = result;
  return PICKET_OK;
}

const char *pk_result_text(picket_result *result, const char *text) {
  for (int i = 0; i < result->text_count; i++) {
    if (strcmp(result->texts[i], text) == 0) {
      return result->texts[i];
    }
  }
  if (result->text_count == result->text_capacity) {
    int capacity = 2 * result->text_capacity + FIRST_TEXTS;
    char **larger = pk_regrow(result->context, result->texts, (size_t)result->text_count,
                              (size_t)capacity, sizeof *larger);
    if (!larger) {
      return NULL;
    }
    result->texts = larger;
    result->text_capacity = capacity;
  }
  char *copy = pk_text_copy(result->context, text);
  if (copy) {
    result->texts[result->text_count++] = copy;
  }
  return copy;
}

picket_status pk_result_fall_short(picket_result *result, const char *format, ...) {
  char text[512];
  va_list arguments;
  va_start(arguments, format);
  vsnprintf(text, sizeof text, format, arguments);
  va_end(arguments);
  char *copy = pk_text_copy(result->context, text);
  if (!copy) {
    return PICKET_ERROR_MEMORY;
  }
  pk_free(result->context, result->shortfall);
  result->shortfall = copy;
  result->complete = false;
  return PICKET_OK;
}

static void free_edges(picket_context *context, int count, picket_edges_answer *answers) {
  for (int i = 0; answers && i < count; i++) {
    pk_free(context, (void *)answers[i].bands);
  }
  pk_free(context, answers);
}

static void free_bands(picket_context *context, int count, picket_bands_answer *answers) {
  for (int i = 0; answers && i < count; i++) {
    for (int p = 0; answers[i].points && p < answers[i].point_count; p++) {
      pk_free(context, (void *)answers[i].points[p].label);
      pk_free(context, (void *)answers[i].points[p].frequency);
    }
    pk_free(context, (void *)answers[i].points);
    pk_free(context, (void *)answers[i].gaps);
  }
  pk_free(context, answers);
}

static void free_slab(picket_context *context, int count, picket_slab_answer *answers) {
  for (int i = 0; answers && i < count; i++) {
    pk_slab_answer_clear(context, &answers[i]);
  }
  pk_free(context, answers);
}

static void free_modes(picket_context *context, int count, picket_modes_answer *answers) {
  for (int i = 0; answers && i < count; i++) {
    picket_modes_point *points = (picket_modes_point *)answers[i].points;
    for (int p = 0; points && p < answers[i].point_count; p++) {
      pk_modes_point_clear(context, &points[p]);
    }
    pk_free(context, points);
  }
  pk_free(context, answers);
}

static void free_match(picket_context *context, int count, picket_match_answer *answers) {
  for (int i = 0; answers && i < count; i++) {
    pk_free(context, (void *)answers[i].points);
  }
  pk_free(context, answers);
}

static void free_index(picket_context *context, int count, picket_index_answer *answers) {
  for (int i = 0; answers && i < count; i++) {
    picket_index_point *points = (picket_index_point *)answers[i].points;
    for (int p = 0; points && p < answers[i].point_count; p++) {
      pk_index_point_clear(context, &points[p]);
    }
    pk_free(context, points);
  }
  pk_free(context, answers);
}

static void free_derivatives(picket_result *result) {
  for (int i = 0; i < result->count; i++) {
    if (result->edge_derivatives) {
      pk_free(result->context, (void *)result->edge_derivatives[i].bands);
    }
    if (result->index_derivatives) {
      pk_free(result->context, (void *)result->index_derivatives[i].points);
    }
  }
  pk_free(result->context, result->edge_derivatives);
  pk_free(result->context, result->index_derivatives);
}

static void free_summary(picket_result *result) {
  for (int i = 0; i < result->count; i++) {
    if (result->summary) {
      pk_free(result->context, result->summary[i].name);
      pk_free(result->context, result->summary[i].text);
      pk_free(result->context, result->summary[i].unit);
    }
    if (result->lines) {
      pk_free(result->context, result->lines[i]);
    }
  }
  pk_free(result->context, result->summary);
  pk_free(result->context, result->lines);
}

static void free_aim(picket_context *context, int count, picket_aim_answer *answers) {
  for (int i = 0; answers && i < count; i++) {
    pk_free(context, (void *)answers[i].parts);
  }
  pk_free(context, answers);
}

static void free_tolerance(picket_context *context, int count, picket_tolerance_answer *answers) {
  for (int i = 0; answers && i < count; i++) {
    pk_tolerance_answer_clear(context, &answers[i]);
  }
  pk_free(context, answers);
}

static void free_taper(picket_context *context, int count, picket_taper_answer *answers) {
  for (int i = 0; answers && i < count; i++) {
    pk_taper_answer_clear(context, &answers[i]);
  }
  pk_free(context, answers);
}

void pk_result_free(picket_result *result) {
  if (!result) {
    return;
  }
  picket_context *context = result->context;
  free_edges(context, result->count, result->edges);
  free_bands(context, result->count, result->bands);
  free_slab(context, result->count, result->slab);
  free_modes(context, result->count, result->modes);
  free_match(context, result->count, result->match);
  free_index(context, result->count, result->index);
  free_derivatives(result);
  free_summary(result);
  free_aim(context, result->count, result->aim);
  free_tolerance(context, result->count, result->tolerance);
  free_taper(context, result->count, result->taper);
  pk_taper_cells_free(context, result->count, result->taper_cells);
  for (int i = 0; i < result->text_count; i++) {
    pk_free(context, result->texts[i]);
  }
  pk_free(context, result->texts);
  pk_free(context, result->name);
  pk_free(context, result->comparison);
  pk_free(context, result->sweep_path);
  pk_free(context, result->sweep_value);
  pk_free(context, result->shortfall);
  pk_free(context, result->json);
  pk_free(context, result->csv);
  pk_free(context, result->figure);
  pk_free(context, result);
  pk_context_release(context);
}
