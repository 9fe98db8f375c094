/* What the generated calls need: objects of every kind, wrong options and texts, and the judgement
 * of what a call answered. See generate.py. */
#ifndef PICKET_TESTS_HARNESS_H
#define PICKET_TESTS_HARNESS_H

#include <float.h>
#include <math.h>
#include <picket.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

static const char TEXT[] =
    "format: 1\n"
    "materials: {core: {constant: {index: 3.476}}, oxide: {constant: {index: 1.444}}}\n"
    "light: {wavelength_nm: [1550], polarization: hy}\n"
    "cell: {pitch_nm: 200, cladding: oxide, lateral: uniform, shapes: [{stripe: {fill: core, "
    "across: z, from_nm: -50, to_nm: 50}}]}\n"
    "slab: {substrate: oxide, films: [{fill: core, thickness_nm: 220}], cover: oxide}\n"
    "section: {cladding: oxide, span_nm: [600, 400], shapes: [{rect: {fill: core, width_nm: 300, "
    "height_nm: 200}}]}\n"
    "aim: {vary: cell.pitch_nm, between: [150, 300], quantity: long_nm, target: 1000}\n";

#define SENTINEL ((void *)TEXT) /* stands in every pointer that a call might fill */
enum { ROOM = 4000000, ENDLESS = 100000, KINDS = 16, FILLER = 0x5a };

typedef struct env {
  picket_context *picket_context; /* null in the second round: freed while its objects live */
  picket_problem *picket_problem; /* null in the third round */
  picket_field *picket_field;
  picket_section_field *picket_section_field;
  picket_result *result[KINDS];
  const char *kind[KINDS];
  picket_options picket_options, wrong_options[9];
  picket_context_options picket_context_options, wrong_picket_context_options[4];
  picket_sweep_request picket_sweep_request, wrong_picket_sweep_request[4];
  picket_match_request picket_match_request, wrong_picket_match_request[4];
  picket_figure_options picket_figure_options, wrong_picket_figure_options[4];
  double value; /* of the sweep */
  double *room; /* [ROOM] */
  char *endless;
  const char *file; /* holds TEXT */
  int calls, faults;
} env;

/* Generated. */
void every_call(env *e);

/* The problem as it was at the beginning, whatever the calls before did to it. */
static inline picket_problem *problem(env *e) {
  picket_problem *fresh = NULL;
  if (e->picket_context && picket_problem_read_text(e->picket_context, TEXT, sizeof TEXT - 1,
                                                    "test", &fresh) == PICKET_OK) {
    picket_problem_free(e->picket_problem);
    e->picket_problem = fresh;
  }
  return e->picket_problem;
}

static inline picket_result *result(env *e, const char *kind) {
  for (int i = 0; i < KINDS; i++) {
    if (e->kind[i] && strcmp(e->kind[i], kind) == 0) {
      return e->result[i];
    }
  }
  return NULL;
}

static inline void fill(void *out, size_t bytes) {
  memset(out, FILLER, bytes);
}

static inline bool filled(const void *out, size_t bytes) {
  for (size_t i = 0; i < bytes; i++) {
    if (((const unsigned char *)out)[i] != FILLER) {
      return false;
    }
  }
  return true;
}

static inline bool same(const void *a, const void *b, size_t bytes) {
  return memcmp(a, b, bytes) == 0;
}

typedef enum expected { RIGHT, REFUSED, EITHER } expected;

static inline void complain(env *e, picket_status status, const char *what, const char *why) {
  printf("%s: answered %s (%s), %s\n", what, picket_status_name(status),
         e->picket_context ? picket_context_message(e->picket_context) : "no context", why);
  e->faults++;
}

static inline void judge(env *e, picket_status status, expected wanted, bool untouched,
                         const char *what) {
  e->calls++;
  if (strcmp(picket_status_name(status), "unknown status") == 0) {
    complain(e, status, what, "which is no status");
  }
  /* Without a context the problem is not as it was. */
  if (wanted == RIGHT && status != PICKET_OK && e->picket_context) {
    complain(e, status, what, "must succeed");
  }
  if (wanted == REFUSED && status != PICKET_ERROR_ARGUMENT) {
    complain(e, status, what, "must be refused as PICKET_ERROR_ARGUMENT");
  }
  if (status != PICKET_OK && !untouched) {
    complain(e, status, what, "but an output was touched");
  }
}

#endif
