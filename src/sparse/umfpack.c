/* Sparse LU factors through UMFPACK. The only file of the library that calls it.
 *
 *   P R A Q = L U      R a row scaling, P and Q permutations, multifrontal elimination
 *
 * The symbolic phase orders the pattern by nested dissection (METIS on A + Aᵀ), once for every
 * later numeric phase. The symmetric strategy is forced: with pivots on the diagonal where they are
 * not tiny (UMFPACK's usual 1e-3 of the column) the ordering survives, where the automatic
 * choice of strategy was measured to take 12 times the time and 6 times the memory.
 *
 * Complex numbers are packed (real, imaginary, real, …), which is the layout of double complex,
 * so UMFPACK's second arrays are null. Solves use work arrays made with the factor and therefore
 * never allocate; iterative refinement is off because eigenpairs are checked by their residuals.
 *
 * T. A. Davis, ACM Trans. Math. Softw. 30, 165 and 196 (2004); G. Karypis and V. Kumar, SIAM J.
 * Sci. Comput. 20, 359 (1998). */
#include <assert.h>
#include <math.h>
#include <pthread.h>
#include <umfpack.h>

#include "base/memory.h"
#include "dense/dense.h"
#include "sparse/sparse.h"

_Static_assert(sizeof(SuiteSparse_long) == sizeof(int64_t), "patterns are handed over as they are");

struct pk_factor {
  picket_context *context;
  const pk_pattern *pattern; /* borrowed */
  pk_scalar scalar;
  double control[UMFPACK_CONTROL];
  void *symbolic;
  void *numeric;             /* null until a numeric phase succeeds */
  const double *values;      /* borrowed; of the last numeric phase */
  SuiteSparse_long *indices; /* [n] work of a solve */
  double *work;              /* [n] real, [4n] complex: sizes from UMFPACK's guide */
  pk_factor_facts facts;
};

/* METIS draws from the random generator of the C library, which belongs to the whole process: it
 * seeds it at the start of each ordering, so one ordering at a time gives the same one always. */
static pthread_mutex_t ordering_lock = PTHREAD_MUTEX_INITIALIZER;

static const SuiteSparse_long *indices_of(const int64_t *values) {
  return (const SuiteSparse_long *)values;
}

static const char *ordering_name(double code) {
  switch ((int)code) {
    case UMFPACK_ORDERING_METIS: return "nested dissection (METIS)";
    case UMFPACK_ORDERING_AMD: return "approximate minimum degree (AMD)";
    case UMFPACK_ORDERING_NONE: return "none";
    default: return "other";
  }
}

/* Turns a status of UMFPACK into one of ours, with its message. */
static picket_status verdict(const pk_factor *factor, SuiteSparse_long status, const char *phase) {
  const long long n = factor->pattern->n;
  switch (status) {
    case UMFPACK_OK: return PICKET_OK;
    case UMFPACK_WARNING_singular_matrix:
      return pk_fail(factor->context, PICKET_ERROR_NUMERIC,
                     "the sparse matrix of %lld unknowns is singular", n);
    case UMFPACK_ERROR_out_of_memory:
      return pk_fail(factor->context, PICKET_ERROR_MEMORY,
                     "memory is out: %s of a sparse matrix of %lld unknowns", phase, n);
    case UMFPACK_ERROR_ordering_failed: /* what METIS reports when its memory is out */
      return pk_fail(factor->context, PICKET_ERROR_MEMORY,
                     "memory is out: ordering of a sparse matrix of %lld unknowns", n);
    default:
      return pk_fail(factor->context, PICKET_ERROR_INTERNAL,
                     "%s of a sparse matrix of %lld unknowns: UMFPACK says %lld, must be 0", phase,
                     n, (long long)status);
  }
}

static void set_control(pk_factor *factor) {
  if (factor->scalar == PK_COMPLEX) {
    umfpack_zl_defaults(factor->control);
  } else {
    umfpack_dl_defaults(factor->control);
  }
  factor->control[UMFPACK_STRATEGY] = UMFPACK_STRATEGY_SYMMETRIC;
  factor->control[UMFPACK_ORDERING] = UMFPACK_ORDERING_METIS;
  factor->control[UMFPACK_IRSTEP] = 0;
}

static picket_status analyse(pk_factor *factor) {
  double info[UMFPACK_INFO];
  const int64_t n = factor->pattern->n;
  const SuiteSparse_long *start = indices_of(factor->pattern->start);
  const SuiteSparse_long *row = indices_of(factor->pattern->row);
  SuiteSparse_long status;
  pthread_mutex_lock(&ordering_lock);
  if (factor->scalar == PK_COMPLEX) {
    status =
        umfpack_zl_symbolic(n, n, start, row, NULL, NULL, &factor->symbolic, factor->control, info);
  } else {
    status = umfpack_dl_symbolic(n, n, start, row, NULL, &factor->symbolic, factor->control, info);
  }
  pthread_mutex_unlock(&ordering_lock);
  picket_status outcome = verdict(factor, status, "symbolic phase");
  if (outcome == PICKET_OK) {
    factor->facts.ordering = ordering_name(info[UMFPACK_ORDERING_USED]);
    factor->facts.symbolic_seconds = info[UMFPACK_SYMBOLIC_WALLTIME];
    pk_log(factor->context, PICKET_LOG_DETAIL,
           "sparse matrix: %lld unknowns, %lld entries, ordering %s, %.3g s", (long long)n,
           (long long)factor->pattern->start[n], factor->facts.ordering,
           factor->facts.symbolic_seconds);
  }
  return outcome;
}

picket_status pk_factor_create(picket_context *context, const pk_pattern *pattern, pk_scalar scalar,
                               pk_factor **out) {
  pk_dense_warm_up(); /* UMFPACK calls BLAS: one thread, and its workspace is there */
  assert(pattern->n > 0);
  picket_status status = PICKET_ERROR_MEMORY;
  const size_t n = (size_t)pattern->n;
  pk_factor *factor = PK_NEW(context, 1, pk_factor);
  if (!factor) {
    return status;
  }
  factor->context = pk_context_hold(context);
  factor->pattern = pattern;
  factor->scalar = scalar;
  factor->indices = PK_NEW(context, n, SuiteSparse_long);
  factor->work = factor->indices ? PK_NEW(context, scalar == PK_COMPLEX ? 4 * n : n, double) : NULL;
  if (factor->work) {
    set_control(factor);
    status = analyse(factor);
  }
  if (status == PICKET_OK) {
    *out = factor;
  } else {
    pk_factor_free(factor);
  }
  return status;
}

static void forget_numeric(pk_factor *factor) {
  if (factor->scalar == PK_COMPLEX) {
    umfpack_zl_free_numeric(&factor->numeric);
  } else {
    umfpack_dl_free_numeric(&factor->numeric);
  }
  factor->values = NULL;
}

void pk_factor_free(pk_factor *factor) {
  if (!factor) {
    return;
  }
  picket_context *context = factor->context;
  forget_numeric(factor);
  if (factor->scalar == PK_COMPLEX) {
    umfpack_zl_free_symbolic(&factor->symbolic);
  } else {
    umfpack_dl_free_symbolic(&factor->symbolic);
  }
  pk_free(context, factor->work);
  pk_free(context, factor->indices);
  pk_free(context, factor);
  pk_context_release(context);
}

static void note_cost(pk_factor *factor, const double *info) {
  pk_factor_facts *facts = &factor->facts;
  facts->entries = (int64_t)(info[UMFPACK_LNZ] + info[UMFPACK_UNZ]);
  facts->flops = info[UMFPACK_FLOPS];
  facts->peak_bytes = info[UMFPACK_PEAK_MEMORY] * info[UMFPACK_SIZE_OF_UNIT];
  facts->numeric_seconds = info[UMFPACK_NUMERIC_WALLTIME];
  pk_log(factor->context, PICKET_LOG_DETAIL,
         "factorised: %lld entries in L + U, %.3g operations, %.1f MB at the peak, %.3g s",
         (long long)facts->entries, facts->flops, facts->peak_bytes / 1e6, facts->numeric_seconds);
}

static picket_status factorise(pk_factor *factor, const double *values) {
  double info[UMFPACK_INFO];
  const SuiteSparse_long *start = indices_of(factor->pattern->start);
  const SuiteSparse_long *row = indices_of(factor->pattern->row);
  SuiteSparse_long status;
  forget_numeric(factor); /* first, so that old and new factors never stand side by side */
  if (factor->scalar == PK_COMPLEX) {
    status = umfpack_zl_numeric(start, row, values, NULL, factor->symbolic, &factor->numeric,
                                factor->control, info);
  } else {
    status = umfpack_dl_numeric(start, row, values, factor->symbolic, &factor->numeric,
                                factor->control, info);
  }
  if (status == UMFPACK_OK && !(info[UMFPACK_RCOND] > 0.0)) {
    status = UMFPACK_WARNING_singular_matrix; /* a NaN among the values ends here too */
  }
  picket_status outcome = verdict(factor, status, "factorisation");
  if (outcome == PICKET_OK) {
    factor->values = values;
    note_cost(factor, info);
  } else {
    forget_numeric(factor); /* UMFPACK hands out the factors of a singular matrix as well */
  }
  return outcome;
}

picket_status pk_factor_real(pk_factor *factor, const double *values) {
  assert(factor->scalar == PK_REAL);
  return factorise(factor, values);
}

picket_status pk_factor_complex(pk_factor *factor, const double complex *values) {
  assert(factor->scalar == PK_COMPLEX);
  return factorise(factor, (const double *)values);
}

picket_status pk_factor_solve_real(pk_factor *factor, const double *b, double *x) {
  assert(factor->scalar == PK_REAL && factor->numeric && x != b);
  const SuiteSparse_long *start = indices_of(factor->pattern->start);
  const SuiteSparse_long *row = indices_of(factor->pattern->row);
  double info[UMFPACK_INFO];
  SuiteSparse_long status =
      umfpack_dl_wsolve(UMFPACK_A, start, row, factor->values, x, b, factor->numeric,
                        factor->control, info, factor->indices, factor->work);
  return verdict(factor, status, "solve");
}

static picket_status solve_complex(pk_factor *factor, SuiteSparse_long system,
                                   const double complex *b, double complex *x) {
  assert(factor->scalar == PK_COMPLEX && factor->numeric && x != b);
  const SuiteSparse_long *start = indices_of(factor->pattern->start);
  const SuiteSparse_long *row = indices_of(factor->pattern->row);
  double info[UMFPACK_INFO];
  SuiteSparse_long status = umfpack_zl_wsolve(system, start, row, factor->values, NULL, (double *)x,
                                              NULL, (const double *)b, NULL, factor->numeric,
                                              factor->control, info, factor->indices, factor->work);
  return verdict(factor, status, "solve");
}

picket_status pk_factor_solve_complex(pk_factor *factor, const double complex *b,
                                      double complex *x) {
  return solve_complex(factor, UMFPACK_A, b, x);
}

picket_status pk_factor_solve_transposed_complex(pk_factor *factor, const double complex *b,
                                                 double complex *x) {
  return solve_complex(factor, UMFPACK_Aat, b, x); /* UMFPACK_At would conjugate */
}

pk_factor_facts pk_factor_cost(const pk_factor *factor) {
  return factor->facts;
}
