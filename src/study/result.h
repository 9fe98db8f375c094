/* What a study found, as the studies fill it and io writes it. One struct for every kind of result:
 * the public face (picket/result.h) is the same for all. */
#ifndef PK_STUDY_RESULT_H
#define PK_STUDY_RESULT_H

#include <picket/aim.h>
#include <picket/bands.h>
#include <picket/derivative.h>
#include <picket/edges.h>
#include <picket/index.h>
#include <picket/match.h>
#include <picket/modes.h>
#include <picket/slab.h>
#include <picket/taper.h>
#include <picket/tolerance.h>

#include "base/context.h"

typedef enum pk_result_kind {
  PK_RESULT_EDGES,
  PK_RESULT_AIM,
  PK_RESULT_BANDS,
  PK_RESULT_SLAB,
  PK_RESULT_MODES,
  PK_RESULT_INDEX,
  PK_RESULT_EDGE_DERIVATIVES,
  PK_RESULT_INDEX_DERIVATIVES,
  PK_RESULT_SUMMARY,
  PK_RESULT_MATCH,
  PK_RESULT_TOLERANCE,
  PK_RESULT_TAPER
} pk_result_kind;

/* One line of a summary: a dotted name, and a number with a unit or a text. */
typedef struct pk_summary_item {
  char *name; /* e.g. "cell.duty" */
  char *text; /* or null when it is a number */
  double value;
  char *unit; /* "" for a pure number */
} pk_summary_item;

struct picket_result {
  picket_context *context; /* held */
  pk_result_kind kind;
  char *name;      /* of the problem */
  double accuracy; /* asked for */
  bool complete;
  char *shortfall;            /* or null */
  int count;                  /* answers; for a summary: items */
  picket_edges_answer *edges; /* arrays inside the answers are owned by the result */
  int comparison_count;
  picket_edge_comparison *comparison; /* or null */
  picket_bands_answer *bands;
  picket_aim_answer *aim;
  picket_tolerance_answer *tolerance;
  picket_taper_answer *taper;
  struct pk_taper_cell *taper_cells; /* [count] on the way to a taper, else null */
  picket_slab_answer *slab;
  picket_modes_answer *modes;
  picket_match_answer *match;
  picket_index_answer *index;
  picket_edge_derivatives *edge_derivatives;
  picket_index_derivatives *index_derivatives;
  pk_summary_item *summary;
  char *sweep_path;    /* what was swept; null: nothing was */
  double *sweep_value; /* [count] of the answers, or null */
  char *json, *csv;    /* made when first asked for */
  char *figure;        /* the script given out last, or null */
  char **lines;        /* of a summary, for people; [count], or null */
  char **texts;        /* notes that are not static, each once */
  int text_count, text_capacity;
};

/* An empty result of a kind, complete, with the name copied. */
picket_status pk_result_create(picket_context *context, pk_result_kind kind, const char *name,
                               double accuracy, picket_result **out);

/* The result's own copy of a text, made at its first use; null when memory is out. */
const char *pk_result_text(picket_result *result, const char *text);

/* Marks a result partial and says why; a later shortfall replaces an earlier one. */
picket_status pk_result_fall_short(picket_result *result, const char *format, ...)
    __attribute__((format(printf, 2, 3)));

/* Accepts null and half-built results. */
void pk_result_free(picket_result *result);

#endif
