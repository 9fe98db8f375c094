/* Dense linear algebra through LAPACK and BLAS. The only file of the library that calls them.
 *
 *   symmetric, Hermitian   A = V diag(λ) Vᴴ          divide and conquer
 *   general                A x = λ x, uᴴ A = λ uᴴ    QR algorithm
 *   pencil                 A x = λ B x               QZ algorithm
 *   LU                     P A = L U                 partial pivoting
 *   orthonormal columns    A = Q R                   Householder reflections
 *   least squares          min |A x - b|₂            singular values, so that a matrix of
 *                                                    deficient rank gives the shortest x
 *
 * Memory: column-major, element (i, j) of an n-row matrix at a[i + j*n].
 * E. Anderson et al., LAPACK Users' Guide, 3rd ed., SIAM 1999.
 *
 * The routines are Fortran: every argument is an address, and each character argument has its
 * length appended to the argument list as a size_t (the convention of gfortran since version 8).
 * Their work arrays are asked for in the routine's own units by a first call with length -1. */
#include <assert.h>
#include <float.h>
#include <limits.h>
#include <math.h>
#include <pthread.h>
#include <stddef.h>

#include "base/memory.h"
#include "dense/dense.h"

/* clang-format off */
void openblas_set_num_threads(int threads);
void zgemm_(const char *trans_a, const char *trans_b, const int *m, const int *n, const int *k,
            const double complex *alpha, const double complex *a, const int *lda,
            const double complex *b, const int *ldb, const double complex *beta, double complex *c,
            const int *ldc, size_t, size_t);
void cblas_zdotc_sub(int n, const void *x, int step_x, const void *y, int step_y, void *dot);
double dznrm2_(const int *n, const double complex *x, const int *step);
void dsyevd_(const char *job, const char *triangle, const int *n, double *a, const int *lda,
             double *w, double *work, const int *lwork, int *iwork, const int *liwork, int *info,
             size_t, size_t);
void zheevd_(const char *job, const char *triangle, const int *n, double complex *a,
             const int *lda, double *w, double complex *work, const int *lwork, double *rwork,
             const int *lrwork, int *iwork, const int *liwork, int *info, size_t, size_t);
void zgeev_(const char *left, const char *right, const int *n, double complex *a, const int *lda,
            double complex *w, double complex *vl, const int *ldvl, double complex *vr,
            const int *ldvr, double complex *work, const int *lwork, double *rwork, int *info,
            size_t, size_t);
void zggev_(const char *left, const char *right, const int *n, double complex *a, const int *lda,
            double complex *b, const int *ldb, double complex *alpha, double complex *beta,
            double complex *vl, const int *ldvl, double complex *vr, const int *ldvr,
            double complex *work, const int *lwork, double *rwork, int *info, size_t, size_t);
void zgetrf_(const int *m, const int *n, double complex *a, const int *lda, int *pivots,
             int *info);
void zgetrs_(const char *trans, const int *n, const int *columns, const double complex *a,
             const int *lda, const int *pivots, double complex *b, const int *ldb, int *info,
             size_t);
void zgetri_(const int *n, double complex *a, const int *lda, const int *pivots,
             double complex *work, const int *lwork, int *info);
void zgeqrf_(const int *m, const int *n, double complex *a, const int *lda, double complex *tau,
             double complex *work, const int *lwork, int *info);
void zungqr_(const int *m, const int *n, const int *k, double complex *a, const int *lda,
             const double complex *tau, double complex *work, const int *lwork, int *info);
void dgelsd_(const int *m, const int *n, const int *columns, double *a, const int *lda, double *b,
             const int *ldb, double *singular, const double *condition, int *rank, double *work,
             const int *lwork, int *iwork, int *info);
/* clang-format on */

static const int ask_for_size = -1;

static void warm_up(void) {
  enum { ORDER = 32 }; /* above the sizes that BLAS treats without its workspace */
  double complex a[ORDER * ORDER], b[ORDER * ORDER];
  int pivots[ORDER], n = ORDER, info = 0;
  openblas_set_num_threads(1);
  for (int i = 0; i < ORDER * ORDER; i++) {
    a[i] = i % (ORDER + 1) == 0 ? 2.0 : 0.01 * (i % 7);
    b[i] = 0.0;
  }
  pk_dense_times(n, n, n, 1.0, a, a, 0.0, b);
  zgetrf_(&n, &n, a, &n, pivots, &info);
}

void pk_dense_warm_up(void) {
  static pthread_once_t once = PTHREAD_ONCE_INIT;
  pthread_once(&once, warm_up);
}

/* One sentence for an iteration of LAPACK that gave up. */
static picket_status give_up(picket_context *context, const char *what, int n, int info) {
  assert(info > 0); /* a negative value means a wrong argument: a defect of this file */
  return pk_fail(
      context, PICKET_ERROR_NUMERIC,
      "the %s of a dense matrix of order %d did not converge (LAPACK says %d, must be 0)", what, n,
      info);
}

picket_status pk_dense_symmetric(picket_context *context, int n, double *a, double *values) {
  assert(n > 0);
  picket_status status = PICKET_ERROR_MEMORY;
  double size = 0.0;
  int info = 0, isize = 0;
  dsyevd_("V", "L", &n, a, &n, values, &size, &ask_for_size, &isize, &ask_for_size, &info, 1, 1);
  int lwork = (int)size;
  double *work = PK_NEW(context, lwork, double);
  int *iwork = work ? PK_NEW(context, isize, int) : NULL;
  if (iwork) {
    dsyevd_("V", "L", &n, a, &n, values, work, &lwork, iwork, &isize, &info, 1, 1);
    status = info == 0 ? PICKET_OK : give_up(context, "spectrum", n, info);
  }
  pk_free(context, iwork);
  pk_free(context, work);
  return status;
}

picket_status pk_dense_hermitian(picket_context *context, int n, double complex *a,
                                 double *values) {
  assert(n > 0);
  picket_status status = PICKET_ERROR_MEMORY;
  double complex size = 0.0;
  double rsize = 0.0;
  int info = 0, isize = 0;
  zheevd_("V", "L", &n, a, &n, values, &size, &ask_for_size, &rsize, &ask_for_size, &isize,
          &ask_for_size, &info, 1, 1);
  int lwork = (int)creal(size), lrwork = (int)rsize;
  double complex *work = PK_NEW(context, lwork, double complex);
  double *rwork = work ? PK_NEW(context, lrwork, double) : NULL;
  int *iwork = rwork ? PK_NEW(context, isize, int) : NULL;
  if (iwork) {
    zheevd_("V", "L", &n, a, &n, values, work, &lwork, rwork, &lrwork, iwork, &isize, &info, 1, 1);
    status = info == 0 ? PICKET_OK : give_up(context, "spectrum", n, info);
  }
  pk_free(context, iwork);
  pk_free(context, rwork);
  pk_free(context, work);
  return status;
}

picket_status pk_dense_general(picket_context *context, int n, double complex *a,
                               double complex *values, double complex *left,
                               double complex *right) {
  assert(n > 0);
  picket_status status = PICKET_ERROR_MEMORY;
  const char *want_left = left ? "V" : "N", *want_right = right ? "V" : "N";
  double complex size = 0.0;
  int info = 0;
  double *rwork = PK_NEW(context, 2 * (size_t)n, double);
  if (!rwork) {
    return status;
  }
  zgeev_(want_left, want_right, &n, a, &n, values, left, &n, right, &n, &size, &ask_for_size, rwork,
         &info, 1, 1);
  int lwork = (int)creal(size);
  double complex *work = PK_NEW(context, lwork, double complex);
  if (work) {
    zgeev_(want_left, want_right, &n, a, &n, values, left, &n, right, &n, work, &lwork, rwork,
           &info, 1, 1);
    status = info == 0 ? PICKET_OK : give_up(context, "spectrum", n, info);
  }
  pk_free(context, work);
  pk_free(context, rwork);
  return status;
}

picket_status pk_dense_pencil(picket_context *context, int n, double complex *a, double complex *b,
                              double complex *alpha, double complex *beta, double complex *right) {
  assert(n > 0);
  picket_status status = PICKET_ERROR_MEMORY;
  const char *want_right = right ? "V" : "N";
  double complex size = 0.0;
  int info = 0;
  double *rwork = PK_NEW(context, 8 * (size_t)n, double);
  if (!rwork) {
    return status;
  }
  zggev_("N", want_right, &n, a, &n, b, &n, alpha, beta, NULL, &n, right, &n, &size, &ask_for_size,
         rwork, &info, 1, 1);
  int lwork = (int)creal(size);
  double complex *work = PK_NEW(context, lwork, double complex);
  if (work) {
    zggev_("N", want_right, &n, a, &n, b, &n, alpha, beta, NULL, &n, right, &n, work, &lwork, rwork,
           &info, 1, 1);
    status = info == 0 ? PICKET_OK : give_up(context, "pencil", n, info);
  }
  pk_free(context, work);
  pk_free(context, rwork);
  return status;
}

picket_status pk_dense_lu(picket_context *context, int n, double complex *a, int *pivots) {
  assert(n > 0);
  int info = 0;
  zgetrf_(&n, &n, a, &n, pivots, &info);
  assert(info >= 0);
  if (info > 0) {
    return pk_fail(context, PICKET_ERROR_NUMERIC,
                   "a dense matrix of order %d is singular: pivot %d is 0, must not be", n, info);
  }
  return PICKET_OK;
}

static void lu_solve(const char *trans, int n, const double complex *a, const int *pivots,
                     int columns, double complex *b) {
  int info = 0;
  if (n > 0 && columns > 0) {
    zgetrs_(trans, &n, &columns, a, &n, pivots, b, &n, &info, 1);
  }
  assert(info == 0);
}

void pk_dense_lu_solve(int n, const double complex *a, const int *pivots, int columns,
                       double complex *b) {
  lu_solve("N", n, a, pivots, columns, b);
}

void pk_dense_lu_solve_transposed(int n, const double complex *a, const int *pivots, int columns,
                                  double complex *b) {
  lu_solve("T", n, a, pivots, columns, b);
}

picket_status pk_dense_inverse(picket_context *context, int n, double complex *a) {
  double complex size = 0.0;
  int info = 0;
  zgetri_(&n, a, &n, NULL, &size, &ask_for_size, &info);
  int lwork = (int)creal(size);
  int *pivots = PK_NEW(context, n, int);
  double complex *work = pivots ? PK_NEW(context, lwork, double complex) : NULL;
  picket_status status = work ? pk_dense_lu(context, n, a, pivots) : PICKET_ERROR_MEMORY;
  if (status == PICKET_OK) {
    zgetri_(&n, a, &n, pivots, work, &lwork, &info);
    assert(info == 0); /* a zero pivot was found by the factorisation */
  }
  pk_free(context, work);
  pk_free(context, pivots);
  return status;
}

picket_status pk_dense_orthonormal(picket_context *context, int rows, int columns,
                                   double complex *a) {
  assert(columns > 0 && rows >= columns);
  double complex size = 0.0;
  int info = 0;
  zungqr_(&rows, &columns, &columns, a, &rows, NULL, &size, &ask_for_size, &info);
  int lwork = (int)creal(size);
  zgeqrf_(&rows, &columns, a, &rows, NULL, &size, &ask_for_size, &info);
  lwork = lwork > (int)creal(size) ? lwork : (int)creal(size);
  double complex *work = PK_NEW(context, (size_t)lwork + (size_t)columns, double complex);
  if (!work) {
    return PICKET_ERROR_MEMORY;
  }
  double complex *tau = work + lwork;
  zgeqrf_(&rows, &columns, a, &rows, tau, work, &lwork, &info);
  zungqr_(&rows, &columns, &columns, a, &rows, tau, work, &lwork, &info);
  assert(info == 0);
  pk_free(context, work);
  return PICKET_OK;
}

void pk_dense_times(int m, int n, int k, double complex alpha, const double complex *a,
                    const double complex *b, double complex beta, double complex *c) {
  const int lda = m > 1 ? m : 1, ldb = k > 1 ? k : 1; /* BLAS refuses a leading dimension of 0 */
  zgemm_("N", "N", &m, &n, &k, &alpha, a, &lda, b, &ldb, &beta, c, &lda, 1, 1);
}

void pk_dense_transposed_times(int m, int n, int k, double complex alpha, const double complex *a,
                               const double complex *b, double complex beta, double complex *c) {
  const int ld = k > 1 ? k : 1, ldc = m > 1 ? m : 1;
  zgemm_("T", "N", &m, &n, &k, &alpha, a, &ld, b, &ld, &beta, c, &ldc, 1, 1);
}

void pk_dense_symmetric_times(int n, double complex alpha, const double complex *a,
                              const double complex *b, double complex beta, double complex *c) {
  enum { PANEL = 64 }; /* columns at a time: wide enough for the full speed of a product */
  for (int from = 0; from < n; from += PANEL) {
    const int to = from + PANEL < n ? from + PANEL : n, width = to - from;
    const size_t at = (size_t)from * (size_t)n;
    zgemm_("N", "N", &to, &width, &n, &alpha, a, &n, b + at, &n, &beta, c + at, &n, 1, 1);
  }
  for (size_t j = 0; j < (size_t)n; j++) {
    for (size_t i = 0; i < j; i++) {
      c[j + i * (size_t)n] = c[i + j * (size_t)n];
    }
  }
}

picket_status pk_dense_least_squares(picket_context *context, int rows, int columns, double *a,
                                     double *b, double *x) {
  assert(columns > 0 && rows >= columns);
  const int one = 1;
  const double condition = -1.0; /* singular values below the rounding of the largest are zero */
  picket_status status = PICKET_ERROR_MEMORY;
  double size = 0.0;
  int info = 0, rank = 0, isize = 0;
  double *singular = PK_NEW(context, columns, double);
  if (!singular) {
    return status;
  }
  dgelsd_(&rows, &columns, &one, a, &rows, b, &rows, singular, &condition, &rank, &size,
          &ask_for_size, &isize, &info);
  int lwork = (int)size;
  double *work = PK_NEW(context, lwork, double);
  int *iwork = work ? PK_NEW(context, isize, int) : NULL;
  if (iwork) {
    dgelsd_(&rows, &columns, &one, a, &rows, b, &rows, singular, &condition, &rank, work, &lwork,
            iwork, &info);
    status = info == 0 ? PICKET_OK : give_up(context, "least-squares problem", columns, info);
  }
  for (int j = 0; status == PICKET_OK && j < columns; j++) {
    x[j] = b[j];
  }
  pk_free(context, iwork);
  pk_free(context, work);
  pk_free(context, singular);
  return status;
}

double complex pk_dense_dot(long n, const double complex *x, const double complex *y) {
  assert(n >= 0 && n <= INT_MAX);
  double complex dot = 0.0;
  cblas_zdotc_sub((int)n, x, 1, y, 1, &dot);
  return dot;
}

double pk_dense_norm(long n, const double complex *x) {
  assert(n >= 0 && n <= INT_MAX);
  const int count = (int)n, one = 1;
  return dznrm2_(&count, x, &one);
}
