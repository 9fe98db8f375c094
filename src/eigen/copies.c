/* Further copies of multiple eigenvalues, and the entry points of the room.
 *
 * Given the found eigenvectors, Q their orthonormal basis [count][n], the deflated operator
 *
 *   D = (1 - Q Qᴴ) Op (1 - Q Qᴴ)
 *
 * has the remaining eigenvalues of Op and zeros. Its largest one is estimated; if it could exceed
 * the least of the found ones, it is computed, its vector joins Q, and so on. At the end, if
 * anything joined, the eigenpairs come from the small matrix H = Qᴴ Op Q (Rayleigh-Ritz; Y. Saad,
 * Numerical Methods for Large Eigenvalue Problems, SIAM 2011, ch. 4). */
#include <assert.h>
#include <math.h>
#include <string.h>

#include "base/memory.h"
#include "dense/dense.h"
#include "eigen/eigen_private.h"

/* An estimate with residuals of this share of the value settles whether a closer look is due;
 * for a value within twice of it the closer look is taken. */
static const double ESTIMATE = 1e-3;
/* Krylov vectors of the estimate: one mode with a good shift needs about eight. */
enum { ESTIMATE_BASIS = 8 };
/* A found vector that keeps less than this outside of the ones before it is no copy of its own:
 * ARPACK's complex vectors of one eigenspace may come out all but parallel. */
static const double INDEPENDENT = 1e-3;
/* H counts as Hermitian below this asymmetry: converged spaces of a Hermitian operator are good
 * to the tolerance, 1e-10 as a rule. */
static const double HERMITIAN = 1e-8;

typedef struct deflation {
  picket_context *context;
  const pk_operator *operator;
  size_t n, width;
  int count, capacity;
  double *q;    /* [capacity][n] elements, orthonormal */
  double *work; /* [n] elements */
} deflation;

static double complex inner(const deflation *d, const double *x, const double *y) {
  if (d->width == 2) {
    return pk_dense_dot((long)d->n, (const double complex *)x, (const double complex *)y);
  }
  double sum = 0.0;
  for (size_t i = 0; i < d->n; i++) {
    sum += x[i] * y[i];
  }
  return sum;
}

/* y += factor x */
static void add(const deflation *d, double complex factor, const double *x, double *y) {
  if (d->width == 2) {
    const double complex *from = (const double complex *)x;
    double complex *to = (double complex *)y;
    for (size_t i = 0; i < d->n; i++) {
      to[i] += factor * from[i];
    }
    return;
  }
  for (size_t i = 0; i < d->n; i++) {
    y[i] += creal(factor) * x[i];
  }
}

static double *column(const deflation *d, int i) {
  return d->q + (size_t)i * d->n * d->width;
}

static void project_out(const deflation *d, double *x) {
  for (int i = 0; i < d->count; i++) {
    add(d, -inner(d, column(d, i), x), column(d, i), x);
  }
}

/* Adds the direction of x to Q if it has one of its own. */
static void join(deflation *d, const double *x) {
  assert(d->count < d->capacity);
  const size_t length = d->n * d->width;
  double *next = column(d, d->count);
  memcpy(next, x, length * sizeof *next);
  const double before = sqrt(creal(inner(d, next, next)));
  project_out(d, next);
  project_out(d, next); /* twice is enough to be orthogonal to rounding (Kahan) */
  const double after = sqrt(creal(inner(d, next, next)));
  if (after < INDEPENDENT * before || after == 0.0) {
    return;
  }
  for (size_t i = 0; i < length; i++) {
    next[i] /= after;
  }
  d->count++;
}

static picket_status apply_deflated(deflation *d, const double *x, double *y) {
  memcpy(d->work, x, d->n * d->width * sizeof *x);
  project_out(d, d->work);
  picket_status status = pk_operator_apply(d->operator, d->work, y);
  if (status == PICKET_OK) {
    project_out(d, y);
  }
  return status;
}

static picket_status apply_real(void *user, const double *x, double *y) {
  return apply_deflated(user, x, y);
}

static picket_status apply_complex(void *user, const double complex *x, double complex *y) {
  return apply_deflated(user, (const double *)x, (double *)y);
}

/* The largest eigenvalue of D is looked at until it is known not to exceed `least`, the magnitude
 * of the smallest found value; each one that does joins Q. */
static picket_status gather(deflation *d, const pk_eigen_request *request, double least,
                            double *vector, int *applications) {
  const pk_operator deflated = {d->width, apply_real, apply_complex, d};
  const double exact = request->tolerance > 0.0 ? request->tolerance : PK_EIGEN_TOLERANCE;
  picket_status status = PICKET_OK;
  while (status == PICKET_OK && d->count < d->capacity) {
    pk_eigen_request one = {
        .n = request->n, .wanted = 1, .seed = request->seed + 1, .real_start = request->real_start};
    double value[2] = {0.0, 0.0};
    int found = 0;
    one.basis = ESTIMATE_BASIS;
    one.tolerance = ESTIMATE;
    status = pk_eigen_once(d->context, &one, &deflated, value, vector, &found, applications);
    const bool missing = d->count < request->wanted;
    if (status != PICKET_OK ||
        (found == 1 && !missing && hypot(value[0], value[1]) < (1.0 - 2.0 * ESTIMATE) * least)) {
      break;
    }
    one.basis = 0;
    one.tolerance = exact;
    one.start = found == 1 ? vector : NULL;
    status = pk_eigen_once(d->context, &one, &deflated, value, vector, &found, applications);
    const int before = d->count;
    if (status == PICKET_OK && found == 1 &&
        (missing || hypot(value[0], value[1]) > (1.0 + 2.0 * exact) * least)) {
      join(d, vector);
    }
    if (d->count == before) {
      break;
    }
  }
  return status;
}

/* H = Qᴴ Op Q, [count][count] column-major, as complex numbers. */
static picket_status small_matrix(deflation *d, double complex *h, double *product) {
  picket_status status = PICKET_OK;
  for (int j = 0; j < d->count && status == PICKET_OK; j++) {
    status = pk_operator_apply(d->operator, column(d, j), product);
    for (int i = 0; i < d->count && status == PICKET_OK; i++) {
      h[i + j * d->count] = inner(d, column(d, i), product);
    }
  }
  return status;
}

static bool is_hermitian(int n, const double complex *h) {
  double largest = 0.0, difference = 0.0;
  for (int i = 0; i < n; i++) {
    for (int j = 0; j < n; j++) {
      largest = fmax(largest, cabs(h[i + j * n]));
      difference = fmax(difference, cabs(h[i + j * n] - conj(h[j + i * n])));
    }
  }
  return difference <= HERMITIAN * largest;
}

/* Eigenpairs of H into values and vectors. The vectors of a Hermitian H are orthonormal even in
 * a multiple eigenspace, which the general solver does not promise; h is real for a real Op, and
 * so are then the vectors. */
static picket_status small_pairs(const deflation *d, double complex *h, double complex *values,
                                 double complex *vectors) {
  const int n = d->count;
  if (d->width == 2 && !is_hermitian(n, h)) {
    return pk_dense_general(d->context, n, h, values, NULL, vectors);
  }
  double *real_values = PK_NEW(d->context, n, double);
  picket_status status = PICKET_ERROR_MEMORY;
  if (real_values) {
    status = pk_dense_hermitian(d->context, n, h, real_values);
  }
  for (int i = 0; status == PICKET_OK && i < n; i++) {
    values[i] = real_values[i];
  }
  for (int i = 0; status == PICKET_OK && i < n * n; i++) {
    vectors[i] = h[i];
  }
  pk_free(d->context, real_values);
  return status;
}

/* The largest pair that was not handed out yet: those that were are marked by a NaN. */
static int take_largest(int n, double complex *values) {
  int best = -1;
  for (int i = 0; i < n; i++) {
    if (!isnan(creal(values[i])) && (best < 0 || cabs(values[i]) > cabs(values[best]))) {
      best = i;
    }
  }
  return best;
}

static void hand_out(const deflation *d, double complex *small_values,
                     const double complex *small_vectors, int wanted, double *values,
                     double *vectors) {
  const size_t length = d->n * d->width;
  for (int k = 0; k < wanted; k++) {
    const int best = take_largest(d->count, small_values);
    double *to = vectors + (size_t)k * length;
    memset(to, 0, length * sizeof *to);
    for (int i = 0; i < d->count; i++) {
      add(d, small_vectors[i + best * d->count], column(d, i), to);
    }
    memcpy(values + (size_t)k * d->width, &small_values[best], d->width * sizeof *values);
    small_values[best] = NAN;
  }
}

static picket_status rayleigh_ritz(deflation *d, int wanted, double *product, double *values,
                                   double *vectors) {
  const size_t square = (size_t)d->count * (size_t)d->count;
  picket_status status = PICKET_ERROR_MEMORY;
  double complex *h = PK_NEW(d->context, square, double complex);
  double complex *pairs = h ? PK_NEW(d->context, square, double complex) : NULL;
  double complex *levels = pairs ? PK_NEW(d->context, d->count, double complex) : NULL;
  if (levels) {
    status = small_matrix(d, h, product);
  }
  if (status == PICKET_OK) {
    status = small_pairs(d, h, levels, pairs);
  }
  if (status == PICKET_OK) {
    hand_out(d, levels, pairs, wanted, values, vectors);
  }
  pk_free(d->context, levels);
  pk_free(d->context, pairs);
  pk_free(d->context, h);
  return status;
}

picket_status pk_eigen_copies(picket_context *context, const pk_eigen_request *request,
                              const pk_operator *operator, double * values, double *vectors,
                              int *applications) {
  const int wanted = request->wanted;
  deflation d = {.context = context,
                 .operator= operator,
                 .n =(size_t) request->n,
                 .width = operator->width,
                 .capacity = 2 * wanted};
  const size_t length = d.n * d.width;
  picket_status status = PICKET_ERROR_MEMORY;
  d.q = PK_NEW(context, (size_t)d.capacity * length, double);
  d.work = d.q ? PK_NEW(context, length, double) : NULL;
  double *vector = d.work ? PK_NEW(context, length, double) : NULL;
  if (vector) {
    for (int i = 0; i < wanted; i++) {
      join(&d, vectors + (size_t)i * length);
    }
    const double *last = values + (size_t)(wanted - 1) * d.width;
    const int independent = d.count;
    status = gather(&d, request, d.width == 1 ? fabs(last[0]) : hypot(last[0], last[1]), vector,
                    applications);
    if (status == PICKET_OK && d.count >= wanted &&
        (d.count > independent || independent < wanted)) {
      *applications += d.count;
      status = rayleigh_ritz(&d, wanted, vector, values, vectors);
    }
  }
  pk_free(context, vector);
  pk_free(context, d.work);
  pk_free(context, d.q);
  return status;
}

static picket_status find(picket_context *context, const pk_eigen_request *request,
                          const pk_operator *operator, double * values, double *vectors, int *found,
                          int *applications) {
  int got = 0, cost = 0;
  picket_status status = pk_eigen_once(context, request, operator, values, vectors, &got, &cost);
  /* The dense solver, used where the basis is the whole space, misses nothing. */
  if (status == PICKET_OK && request->every_copy && got == request->wanted &&
      pk_eigen_basis(request) < request->n) {
    status = pk_eigen_copies(context, request, operator, values, vectors, &cost);
  }
  if (status == PICKET_OK) {
    *found = got;
    if (applications) {
      *applications = cost;
    }
  }
  return status;
}

picket_status pk_eigen_symmetric(picket_context *context, const pk_eigen_request *request,
                                 pk_apply_real apply, void *user, double *values, double *vectors,
                                 int *found, int *applications) {
  const pk_operator operator= {.width = 1, .real = apply, .user = user};
  return find(context, request, &operator, values, vectors, found, applications);
}

picket_status pk_eigen_complex(picket_context *context, const pk_eigen_request *request,
                               pk_apply_complex apply, void *user, double complex *values,
                               double complex *vectors, int *found, int *applications) {
  const pk_operator operator= {.width = 2, .complex_ = apply, .user = user};
  return find(context, request, &operator,(double *) values, (double *)vectors, found,
              applications);
}
