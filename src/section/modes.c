/* See modes.h. Op = (T - σ)⁻¹ has the eigenvalues 1/(β² - σ). In a real section the factors are
 * real and act on the real and the imaginary part by themselves. */
#include "section/modes.h"

#include <math.h>
#include <string.h>

#include "base/memory.h"
#include "dense/dense.h"
#include "eigen/eigen.h"
#include "section/forms.h"
#include "section/orthogonal.h"
#include "section/section_private.h"

/* Any fixed number: the same input gives the same digits. */
static const uint64_t START_SEED = 45022;

/* Modes with a larger residual get a step of inverse iteration. */
static const double PURIFY_ABOVE = 1e-12;

/* A real matrix has real β² or conjugate pairs; a smaller imaginary part is none. */
static const double ROUNDING = 1e-9;

typedef struct solve {
  picket_context *context;
  pk_section *section;
  int64_t n;
  double k0;
  double complex shift;
  pk_factor *factor;
  double complex *values; /* [nnz] or null */
  double *real_values;    /* [nnz] or null */
  double *part;           /* [2n] of a real solve */
} solve;

static void solve_close(solve *k) {
  pk_factor_free(k->factor);
  pk_free(k->context, k->values);
  pk_free(k->context, k->real_values);
  pk_free(k->context, k->part);
}

static picket_status solve_open(solve *k) {
  const pk_pattern *pattern = pk_section_pattern(k->section);
  bool real = pk_section_is_real(k->section) && cimag(k->shift) == 0;
  int64_t entries = pattern->start[k->n];
  picket_status status =
      pk_factor_create(k->context, pattern, real ? PK_REAL : PK_COMPLEX, &k->factor);
  if (status != PICKET_OK) {
    return status;
  }
  if (!real) {
    k->values = PK_NEW(k->context, entries, double complex);
    if (!k->values) {
      return PICKET_ERROR_MEMORY;
    }
    pk_section_values(k->section, k->k0, k->shift, k->values);
    return pk_factor_complex(k->factor, k->values);
  }
  k->real_values = PK_NEW(k->context, entries, double);
  k->part = PK_NEW(k->context, 2 * k->n, double);
  if (!k->real_values || !k->part) {
    return PICKET_ERROR_MEMORY;
  }
  pk_section_values_real(k->section, k->k0, creal(k->shift), k->real_values);
  return pk_factor_real(k->factor, k->real_values);
}

static picket_status apply(void *user, const double complex *x, double complex *y) {
  solve *k = user;
  if (k->values) {
    return pk_factor_solve_complex(k->factor, x, y);
  }
  return pk_factor_solve_parts(k->factor, k->n, x, y, k->part);
}

void pk_section_modes_clear(picket_context *context, int count, pk_section_mode *modes) {
  for (int i = 0; modes && i < count; i++) {
    pk_free(context, modes[i].h);
    modes[i].h = NULL;
  }
}

/* T h, a row at a time. */
static double complex row_times(const pk_section *section, double k0, int64_t r,
                                const double complex *h) {
  pk_row row;
  pk_section_row(section, k0, r, &row);
  double complex sum = 0;
  for (int t = 0; t < row.count; t++) {
    sum += row.value[t] * h[row.column[t]];
  }
  return sum;
}

double pk_section_residual(const pk_section *section, double k0, const pk_section_mode *mode) {
  double wrong = 0, size = 0;
  for (int64_t r = 0; r < pk_section_size(section); r++) {
    double complex h = mode->h[r];
    double complex e = row_times(section, k0, r, mode->h) - mode->beta_square * h;
    wrong += creal(e * conj(e));
    size += creal(h * conj(h));
  }
  return sqrt(wrong / size) / cabs(mode->beta_square);
}

/* The wave that goes or decays along +z. A guided wave is told by Re β: its Im β may come out
 * negative by rounding or, with a layer that a wall stands too close to, by a little more. */
static double complex forward_root(double complex square) {
  double complex root = csqrt(square); /* Re >= 0 */
  return cimag(root) < -creal(root) ? -root : root;
}

/* β² = h·T h / h·h, with the conjugate: for a vector off by δ it is off by δ times the departure
 * from symmetry, so the value of Arnoldi is kept unless the vector was made anew. */
static void take_value(const pk_section *section, double k0, pk_section_mode *mode) {
  double complex sum = 0, size = 0;
  for (int64_t r = 0; r < pk_section_size(section); r++) {
    sum += conj(mode->h[r]) * row_times(section, k0, r, mode->h);
    size += conj(mode->h[r]) * mode->h[r];
  }
  mode->beta_square = sum / size;
}

static picket_status purify(solve *k, pk_section_mode *mode) {
  double complex *fresh = PK_NEW(k->context, k->n, double complex);
  if (!fresh) {
    return PICKET_ERROR_MEMORY;
  }
  picket_status status = apply(k, mode->h, fresh);
  if (status == PICKET_OK) {
    double scale = 1 / pk_dense_norm((long)k->n, fresh);
    for (int64_t p = 0; p < k->n; p++) {
      mode->h[p] = scale * fresh[p];
    }
    take_value(k->section, k->k0, mode);
  }
  pk_free(k->context, fresh);
  return status;
}

static picket_status judge(solve *k, pk_section_mode *mode) {
  mode->residual = pk_section_residual(k->section, k->k0, mode);
  picket_status status = PICKET_OK;
  if (mode->residual > PURIFY_ABOVE) {
    status = purify(k, mode);
    mode->residual = pk_section_residual(k->section, k->k0, mode);
  }
  if (status == PICKET_OK && !(mode->residual <= PK_SECTION_RESIDUAL)) {
    status = pk_fail(k->context, PICKET_ERROR_NUMERIC,
                     "a mode of the section has a residual of %.1e, allowed %.1e", mode->residual,
                     PK_SECTION_RESIDUAL);
  }
  return status;
}

static void sort_modes(int count, pk_section_mode *modes) {
  for (int i = 1; i < count; i++) {
    pk_section_mode moved = modes[i];
    int at = i;
    while (at > 0 && creal(modes[at - 1].beta_square) < creal(moved.beta_square)) {
      modes[at] = modes[at - 1];
      at--;
    }
    modes[at] = moved;
  }
}

static picket_status collect(solve *k, int found, const double complex *values,
                             const double complex *vectors, pk_section_mode *modes) {
  for (int i = 0; i < found; i++) {
    modes[i].h = pk_copy(k->context, vectors + i * k->n, (size_t)k->n, sizeof(double complex));
    if (!modes[i].h) {
      return PICKET_ERROR_MEMORY;
    }
    modes[i].beta_square = k->shift + 1 / values[i];
    picket_status status = judge(k, &modes[i]);
    if (status != PICKET_OK) {
      return status;
    }
    if (k->real_values &&
        fabs(cimag(modes[i].beta_square)) < ROUNDING * cabs(modes[i].beta_square)) {
      modes[i].beta_square = creal(modes[i].beta_square);
    }
    modes[i].beta = forward_root(modes[i].beta_square);
  }
  sort_modes(found, modes);
  return pk_section_orthogonalise(k->section, k->k0, found, modes);
}

static picket_status run(solve *k, int wanted, pk_section_mode *modes, int *found) {
  double complex *values = PK_NEW(k->context, wanted, double complex);
  double complex *vectors = PK_NEW(k->context, wanted * k->n, double complex);
  int converged = 0;
  picket_status status = values && vectors ? solve_open(k) : PICKET_ERROR_MEMORY;
  if (status == PICKET_OK) {
    pk_eigen_request request = {.n = k->n,
                                .wanted = wanted,
                                .seed = START_SEED,
                                .tolerance = 1e-12,
                                .real_start = true,
                                .every_copy = true};
    status = pk_eigen_complex(k->context, &request, apply, k, values, vectors, &converged, NULL);
  }
  if (status == PICKET_OK && converged == 0) {
    status = pk_fail(k->context, PICKET_ERROR_NUMERIC, "no mode near β² = %g /µm² converged",
                     creal(k->shift));
  }
  if (status == PICKET_OK) {
    memset(modes, 0, (size_t)wanted * sizeof *modes);
    status = collect(k, converged, values, vectors, modes);
    if (status != PICKET_OK) {
      pk_section_modes_clear(k->context, converged, modes);
    }
  }
  if (status == PICKET_OK) {
    *found = converged;
  }
  pk_free(k->context, values);
  pk_free(k->context, vectors);
  return status;
}

picket_status pk_section_modes(pk_section *section, double k0, double complex shift, int wanted,
                               pk_section_mode *modes, int *found) {
  int64_t n = pk_section_size(section);
  solve k = {.context = section->context, .section = section, .n = n, .k0 = k0, .shift = shift};
  picket_status status = run(&k, wanted < n ? wanted : (int)n, modes, found);
  solve_close(&k);
  return status;
}
