/* A few eigenpairs of largest magnitude of a large operator, Op x = λ x, through ARPACK. The only
 * file of the library that calls it.
 *
 * Implicitly restarted Arnoldi (Lanczos for a symmetric Op): an orthonormal basis V of m vectors
 * spanning {x, Op x, Op² x, …}, Op V = V H + r eᵀ; the eigenvalues of the small H approach those
 * of Op, and the unwanted ones are filtered out of the start vector until
 * |r| |eᵀ y| <= tolerance |λ|. ARPACK hands control back whenever it wants Op applied.
 * R. B. Lehoucq, D. C. Sorensen and C. Yang, ARPACK Users' Guide, SIAM 1998.
 *
 * One code serves both scalars: `width` is the number of doubles per element (1 real, 2 complex),
 * and every array is an array of doubles, double complex being a pair of them in memory. Basis
 * and vectors are column-major: vector j stands at v[j*n*width].
 *
 * ARPACK 3.8 keeps its state in static variables, so an iteration from its first call to the
 * extraction of the eigenvectors runs under one lock of the whole process. */
#include <assert.h>
#include <limits.h>
#include <math.h>
#include <pthread.h>
#include <string.h>

#include "base/memory.h"
#include "dense/dense.h"
#include "eigen/eigen_private.h"

/* clang-format off */
void dsaupd_(int *ido, const char *bmat, const int *n, const char *which, const int *nev,
             const double *tol, double *resid, const int *ncv, double *v, const int *ldv,
             int *iparam, int *ipntr, double *workd, double *workl, const int *lworkl, int *info,
             size_t, size_t);
void dseupd_(const int *rvec, const char *howmny, int *select, double *d, double *z,
             const int *ldz, const double *sigma, const char *bmat, const int *n,
             const char *which, const int *nev, const double *tol, double *resid, const int *ncv,
             double *v, const int *ldv, int *iparam, int *ipntr, double *workd, double *workl,
             const int *lworkl, int *info, size_t, size_t, size_t);
void znaupd_(int *ido, const char *bmat, const int *n, const char *which, const int *nev,
             const double *tol, double *resid, const int *ncv, double *v, const int *ldv,
             int *iparam, int *ipntr, double *workd, double *workl, const int *lworkl,
             double *rwork, int *info, size_t, size_t);
void zneupd_(const int *rvec, const char *howmny, int *select, double *d, double *z,
             const int *ldz, const double *sigma, double *workev, const char *bmat, const int *n,
             const char *which, const int *nev, const double *tol, double *resid, const int *ncv,
             double *v, const int *ldv, int *iparam, int *ipntr, double *workd, double *workl,
             const int *lworkl, double *rwork, int *info, size_t, size_t, size_t);
/* clang-format on */

/* Restarts before ARPACK stops with what it has. A good shift needs fewer than 10; one restart
 * costs up to `basis` applications. */
enum { MOST_RESTARTS = 100 };

/* The share of noise mixed into a guess of the start vector: a guess of one symmetry would
 * otherwise never reach modes of another, and an exact eigenvector would end the Krylov sequence
 * at once. Small enough to keep the worth of the guess. */
static const double GUESS_NOISE = 1e-6;

static pthread_mutex_t iteration_lock = PTHREAD_MUTEX_INITIALIZER;

typedef struct krylov {
  picket_context *context;
  const pk_operator *operator;
  size_t width;
  int n, wanted, basis;
  double tolerance;
  int applications;

  double *residual; /* [n] elements; the start vector first */
  double *v;        /* [basis][n] elements; the eigenvectors at the end */
  double *values;   /* [basis] elements: more than `wanted` may converge */
  double *workd;    /* [3n] elements */
  double *workl;    /* [work_length] elements */
  double *workev;   /* [3 basis] elements */
  double *rwork;    /* [basis] doubles */
  int *select;      /* [basis] */
  int work_length;
  int iparam[11], ipntr[14]; /* sizes fixed by ARPACK */
  int converged;
} krylov;

/* y = Op x, counted, its status passed on, and refused when it is not finite: ARPACK would turn in
 * circles on a NaN. */
static picket_status apply(krylov *k, const double *x, double *y) {
  picket_status status = pk_operator_apply(k->operator, x, y);
  k->applications++;
  double sum = 0.0;
  for (size_t i = 0; status == PICKET_OK && i < (size_t)k->n * k->width; i++) {
    sum += fabs(y[i]);
  }
  if (status == PICKET_OK && !isfinite(sum)) {
    status = pk_fail(k->context, PICKET_ERROR_NUMERIC,
                     "application %d of an operator of order %d gave a number that is not finite",
                     k->applications, k->n);
  }
  return status;
}

/* The next of a fixed sequence of numbers in [-1, 1): G. L. Steele, D. Lea and C. H. Flood, OOPSLA
 * 2014 (their mixing constants); the upper 53 bits fill a double. */
static double next_random(uint64_t *state) {
  uint64_t z = *state += UINT64_C(0x9e3779b97f4a7c15);
  z = (z ^ (z >> 30)) * UINT64_C(0xbf58476d1ce4e5b9);
  z = (z ^ (z >> 27)) * UINT64_C(0x94d049bb133111eb);
  z ^= z >> 31;
  return ldexp((double)(z >> 11), -52) - 1.0;
}

static void set_start(krylov *k, const pk_eigen_request *request) {
  const size_t length = (size_t)k->n * k->width;
  const double *guess = request->start;
  uint64_t state = request->seed;
  double largest = 0.0, imaginary = 0.0;
  for (size_t i = 0; guess && i < length; i++) {
    largest = fmax(largest, fabs(guess[i]));
    imaginary = i % k->width == 1 ? fmax(imaginary, fabs(guess[i])) : imaginary;
  }
  const double noise = largest > 0.0 ? GUESS_NOISE * largest : 1.0;
  const bool real = largest > 0.0 ? imaginary == 0.0 : request->real_start;
  for (size_t i = 0; i < length; i++) {
    double own = noise * next_random(&state);
    k->residual[i] = (real && i % k->width == 1 ? 0.0 : own) + (largest > 0.0 ? guess[i] : 0.0);
  }
}

static void krylov_release(krylov *k) {
  void *arrays[] = {k->residual, k->v,      k->values, k->workd,
                    k->workl,    k->workev, k->rwork,  k->select};
  for (size_t i = 0; i < sizeof arrays / sizeof *arrays; i++) {
    pk_free(k->context, arrays[i]);
  }
}

/* Work arrays of the sizes that ARPACK's guide gives. */
static picket_status krylov_prepare(krylov *k, const pk_eigen_request *request) {
  const size_t n = (size_t)k->n * k->width, basis = (size_t)k->basis;
  const bool real = k->width == 1;
  k->work_length = real ? k->basis * (k->basis + 8) : k->basis * (3 * k->basis + 5);
  k->residual = PK_NEW(k->context, n, double);
  k->v = k->residual ? PK_NEW(k->context, n * basis, double) : NULL;
  k->values = k->v ? PK_NEW(k->context, basis * k->width, double) : NULL;
  k->workd = k->values ? PK_NEW(k->context, 3 * n, double) : NULL;
  k->workl = k->workd ? PK_NEW(k->context, (size_t)k->work_length * k->width, double) : NULL;
  k->workev = k->workl ? PK_NEW(k->context, 3 * basis * k->width, double) : NULL;
  k->rwork = k->workev ? PK_NEW(k->context, basis, double) : NULL;
  k->select = k->rwork ? PK_NEW(k->context, basis, int) : NULL;
  if (!k->select) {
    return PICKET_ERROR_MEMORY;
  }
  k->iparam[0] = 1; /* exact shifts */
  k->iparam[2] = request->restarts > 0 ? request->restarts : MOST_RESTARTS;
  k->iparam[3] = 1; /* block size; the only one there is */
  k->iparam[6] = 1; /* mode 1: Op itself, standard inner product */
  set_start(k, request);
  return PICKET_OK;
}

static void advance(krylov *k, int *ido, int *info) {
  if (k->width == 1) {
    dsaupd_(ido, "I", &k->n, "LM", &k->wanted, &k->tolerance, k->residual, &k->basis, k->v, &k->n,
            k->iparam, k->ipntr, k->workd, k->workl, &k->work_length, info, 1, 2);
  } else {
    znaupd_(ido, "I", &k->n, "LM", &k->wanted, &k->tolerance, k->residual, &k->basis, k->v, &k->n,
            k->iparam, k->ipntr, k->workd, k->workl, &k->work_length, k->rwork, info, 1, 2);
  }
}

/* The converged eigenpairs, vectors over the basis. */
static void extract(krylov *k, int *info) {
  const int with_vectors = 1;
  const double no_shift[2] = {0.0, 0.0}; /* used by the modes 3 to 5 only */
  if (k->width == 1) {
    dseupd_(&with_vectors, "A", k->select, k->values, k->v, &k->n, no_shift, "I", &k->n, "LM",
            &k->wanted, &k->tolerance, k->residual, &k->basis, k->v, &k->n, k->iparam, k->ipntr,
            k->workd, k->workl, &k->work_length, info, 1, 1, 2);
  } else {
    zneupd_(&with_vectors, "A", k->select, k->values, k->v, &k->n, no_shift, k->workev, "I", &k->n,
            "LM", &k->wanted, &k->tolerance, k->residual, &k->basis, k->v, &k->n, k->iparam,
            k->ipntr, k->workd, k->workl, &k->work_length, k->rwork, info, 1, 1, 2);
  }
}

/* The whole iteration; the lock is held by the caller. */
static picket_status iterate_locked(krylov *k) {
  enum { APPLY_FIRST = -1, APPLY = 1, DONE = 99 };
  /* What ARPACK may end with and still have results: all converged, restarts used up, or a basis
   * too small to go on. */
  enum { ALL = 0, RESTARTS_USED = 1, NO_SHIFTS = 3 };
  int ido = 0, info = 1; /* 1: the start vector is ours */
  do {
    advance(k, &ido, &info);
    if (ido == APPLY_FIRST || ido == APPLY) {
      picket_status status = apply(k, k->workd + (size_t)(k->ipntr[0] - 1) * k->width,
                                   k->workd + (size_t)(k->ipntr[1] - 1) * k->width);
      if (status != PICKET_OK) {
        return status;
      }
    }
  } while (ido != DONE);
  if (info != ALL && info != RESTARTS_USED && info != NO_SHIFTS) {
    return pk_fail(k->context, PICKET_ERROR_NUMERIC,
                   "the eigenvalue iteration of order %d failed (ARPACK says %d, must be 0)", k->n,
                   info);
  }
  if (k->iparam[4] > 0) {
    extract(k, &info);
    if (info != 0) {
      return pk_fail(k->context, PICKET_ERROR_NUMERIC,
                     "extracting eigenvectors of order %d failed (ARPACK says %d, must be 0)", k->n,
                     info);
    }
  }
  k->converged = k->iparam[4];
  return PICKET_OK;
}

static picket_status iterate(krylov *k) {
  pthread_mutex_lock(&iteration_lock);
  picket_status status = iterate_locked(k);
  pthread_mutex_unlock(&iteration_lock);
  return status;
}

/* The operator as a dense matrix, column by column into v, its spectrum solved there. All n pairs
 * come out, so that a multiple eigenvalue shows all its copies. */
static picket_status solve_dense(krylov *k) {
  const size_t n = (size_t)k->n;
  picket_status status = PICKET_OK;
  double *unit = k->workd;
  for (size_t j = 0; j < n && status == PICKET_OK; j++) {
    memset(unit, 0, n * k->width * sizeof *unit);
    unit[j * k->width] = 1.0;
    status = apply(k, unit, k->v + j * n * k->width);
  }
  if (status != PICKET_OK) {
    return status;
  }
  if (k->width == 1) {
    status = pk_dense_symmetric(k->context, k->n, k->v, k->values);
  } else {
    double complex *matrix = pk_copy(k->context, k->v, n * n, sizeof *matrix);
    status = matrix ? pk_dense_general(k->context, k->n, matrix, (double complex *)k->values, NULL,
                                       (double complex *)k->v)
                    : PICKET_ERROR_MEMORY;
    pk_free(k->context, matrix);
  }
  k->converged = k->n;
  return status;
}

static double magnitude(const krylov *k, int i) {
  const double *value = k->values + (size_t)i * k->width;
  return k->width == 1 ? fabs(value[0]) : hypot(value[0], value[1]);
}

/* order[] of the converged pairs by falling magnitude; equal ones keep ARPACK's order, which is
 * fixed for a fixed start vector. */
static void sort_by_magnitude(const krylov *k, int *order) {
  for (int i = 0; i < k->converged; i++) {
    int j = i;
    for (; j > 0 && magnitude(k, order[j - 1]) < magnitude(k, i); j--) {
      order[j] = order[j - 1];
    }
    order[j] = i;
  }
}

/* Copies the `wanted` largest out; complex vectors are brought to unit norm. */
static int hand_out(krylov *k, double *values, double *vectors) {
  const size_t length = (size_t)k->n * k->width;
  const int found = k->converged < k->wanted ? k->converged : k->wanted;
  sort_by_magnitude(k, k->select);
  for (int i = 0; i < found; i++) {
    const double *from = k->v + (size_t)k->select[i] * length;
    double *to = vectors + (size_t)i * length;
    memcpy(values + (size_t)i * k->width, k->values + (size_t)k->select[i] * k->width,
           k->width * sizeof *values);
    double scale = 1.0;
    if (k->width == 2) {
      scale = 1.0 / pk_dense_norm(k->n, (const double complex *)from);
    }
    for (size_t j = 0; j < length; j++) {
      to[j] = scale * from[j];
    }
  }
  return found;
}

int pk_eigen_basis(const pk_eigen_request *request) {
  enum { LEAST = 20 }; /* and 2 wanted + 1: measured to cost fewest applications */
  int64_t basis = request->basis;
  if (basis == 0) {
    basis = 2 * (int64_t)request->wanted + 1 > LEAST ? 2 * (int64_t)request->wanted + 1 : LEAST;
  }
  if (basis < (int64_t)request->wanted + 2) {
    basis = (int64_t)request->wanted + 2;
  }
  return (int)(basis < request->n ? basis : request->n);
}

picket_status pk_eigen_once(picket_context *context, const pk_eigen_request *request,
                            const pk_operator *operator, double * values, double *vectors,
                            int *found, int *applications) {
  assert(request->n >= 1 && request->n <= INT_MAX);
  assert(request->wanted >= 1 && request->wanted <= request->n);
  krylov k = {.context = context,
              .operator= operator,
              .width = operator->width,
              .n = (int)request->n,
              .wanted = request->wanted,
              .basis = pk_eigen_basis(request),
              .tolerance = request->tolerance > 0.0 ? request->tolerance : PK_EIGEN_TOLERANCE};
  picket_status status = krylov_prepare(&k, request);
  if (status == PICKET_OK) {
    status = k.basis == k.n ? solve_dense(&k) : iterate(&k);
  }
  if (status == PICKET_OK) {
    *found = hand_out(&k, values, vectors);
    *applications += k.applications;
  }
  krylov_release(&k);
  return status;
}
