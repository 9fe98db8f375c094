/* See corner_patch.h. The patch reaches n cells along each arm, with the exact singular solution on
 * its boundary. In unit spacing K(c, n), the discrete less the exact energy, tends to the constant
 * of h^{2α}; what remains at finite n falls as n^{2α-2}, n^{2α-4} (the error of the scheme away
 * from the corner), so K(c, ∞) follows from a few n, and c from K(c, ∞) = 0.
 *
 * Each quadrant is a uniform rectangular lattice, so its interior is eliminated by sine transforms:
 * with s_k(i) = (2/n)^½ sin(πki/n), λ_k = 2 - 2 cos(πk/n), ρ = spacing along v / spacing along u,
 * and boundary values g on its sides (S along the u arm, W along the v arm, N and E opposite), its
 * interior energy is
 *   (g_S² + g_N²)/ρ + ρ (g_W² + g_E²) - Σ_kl R_kl² / (ρ λ_k + λ_l/ρ),
 *   R_kl = ρ s_k(1) (g_W,l ± g_E,l) + s_l(1) (g_S,k ± g_N,k)/ρ,
 * the sign being (-1)^{k+1} and (-1)^{l+1}. Left are the sine coefficients on the four arms and the
 * corner itself: a dense system of 4(n-1)+1 unknowns
 *   E = xᵀAx - 2bᵀx + d.
 * The four corner edges e, weight w_e and difference d_eᵀx, enter by c Σ w_e (d_eᵀx)²: an update of
 * rank four, so K as a function of c costs one factorisation in all. Forms are bilinear throughout,
 * so complex permittivities need nothing new. */
#include "operator/corner_patch.h"

#include <math.h>
#include <string.h>

#include "base/memory.h"
#include "dense/dense.h"
#include "operator/corner_exponent.h"

static const double QUARTER_TURN = 1.57079632679489661923;
static const double PI = 3.14159265358979323846;

enum { EDGES = 4, COLUMNS = EDGES + 1 };

typedef struct patch {
  picket_context *context;
  int n, side, size; /* side = n - 1 nodes inside an arm; size = 4 side + 1, the corner last */
  double complex eta[4];
  double spacing[4];
  double complex alpha, a[PK_SECTORS], b[PK_SECTORS];
  double *sine;   /* [side + 1] k, i from 1: s_k(i) by (k i) modulo 2n, see sine_of */
  double *lambda; /* [side] */
  double complex
      *far[2]; /* [n + 1] values on the sides E and N of a quadrant, from the arm outwards */
  double complex *far_hat[2]; /* [side] */
  double complex *row;        /* [side * side] R of the known sides, then divided */
  double complex *matrix;     /* [size * size] */
  double complex *right;      /* [size * COLUMNS]: b, then the four d_e */
  int *pivots;
  double complex constant; /* d */
  double complex weight[EDGES];
} patch;

static void patch_close(patch *p) {
  void *blocks[] = {p->sine,       p->lambda, p->far[0], p->far[1], p->far_hat[0],
                    p->far_hat[1], p->row,    p->matrix, p->right,  p->pivots};
  for (size_t i = 0; i < sizeof blocks / sizeof blocks[0]; i++) {
    pk_free(p->context, blocks[i]);
  }
}

static double sine_of(const patch *p, int k, int i) {
  return p->sine[(k * i) % (2 * p->n)];
}

static picket_status patch_open(picket_context *context, const pk_corner_site *site,
                                double complex alpha, int n, patch *p) {
  memset(p, 0, sizeof *p);
  p->context = context;
  p->n = n;
  p->side = n - 1;
  p->size = 4 * p->side + 1;
  p->alpha = alpha;
  p->sine = PK_NEW(context, 2 * n, double);
  p->lambda = PK_NEW(context, p->side, double);
  for (int i = 0; i < 2; i++) {
    p->far[i] = PK_NEW(context, n + 1, double complex);
    p->far_hat[i] = PK_NEW(context, p->side, double complex);
  }
  p->row = PK_NEW(context, p->side * p->side, double complex);
  p->matrix = PK_NEW(context, p->size * p->size, double complex);
  p->right = PK_NEW(context, p->size * COLUMNS, double complex);
  p->pivots = PK_NEW(context, p->size, int);
  if (!p->sine || !p->lambda || !p->far[0] || !p->far[1] || !p->far_hat[0] || !p->far_hat[1] ||
      !p->row || !p->matrix || !p->right || !p->pivots) {
    patch_close(p);
    return PICKET_ERROR_MEMORY;
  }
  for (int i = 0; i < 2 * n; i++) {
    p->sine[i] = sqrt(2.0 / n) * sin(PI * i / n);
  }
  for (int k = 1; k < n; k++) {
    p->lambda[k - 1] = 2 - 2 * cos(PI * k / n);
  }
  pk_sectors sectors = {.count = 4};
  for (int q = 0; q < 4; q++) {
    sectors.angle[q] = QUARTER_TURN;
    sectors.permittivity[q] = site->permittivity[q];
    p->eta[q] = 1 / site->permittivity[q];
    p->spacing[q] = site->spacing[q];
  }
  pk_corner_shape(&sectors, alpha, 0, p->a, p->b);
  return PICKET_OK;
}

/* r^α φ at a point of quadrant q, given along its first and second arm. */
static double complex singular_at(const patch *p, int q, double along, double across) {
  double complex turn = p->alpha * atan2(across, along);
  return cpow(hypot(along, across), p->alpha) * (p->a[q] * ccos(turn) + p->b[q] * csin(turn));
}

/* Values on the far sides of quadrant q: far[0] faces arm q (parallel to arm q + 1), far[1] faces
 * the other. */
static void fill_far(patch *p, int q) {
  double first = p->spacing[q], second = p->spacing[(q + 1) % 4];
  for (int i = 0; i <= p->n; i++) {
    p->far[0][i] = singular_at(p, q, p->n * first, i * second);
    p->far[1][i] = singular_at(p, q, i * first, p->n * second);
  }
  for (int side = 0; side < 2; side++) {
    for (int k = 1; k < p->n; k++) {
      double complex sum = 0;
      for (int i = 1; i < p->n; i++) {
        sum += sine_of(p, k, i) * p->far[side][i];
      }
      p->far_hat[side][k - 1] = sum;
    }
  }
}

/* Edges along the far sides carry half a weight, as only their inner half lies in the patch. */
static double complex far_edges(const patch *p, double ratio) {
  double complex sum = 0;
  for (int i = 0; i < p->n; i++) {
    double complex e = p->far[0][i + 1] - p->far[0][i], n = p->far[1][i + 1] - p->far[1][i];
    sum += 0.5 * (e * e / ratio + n * n * ratio);
  }
  return sum;
}

/* Adds the interior of quadrant q. First arm: index k; second arm: index l. */
static void add_quadrant(patch *p, int q) {
  int side = p->side, size = p->size;
  int first = q * side, second = ((q + 1) % 4) * side;
  double ratio = p->spacing[(q + 1) % 4] / p->spacing[q];
  double complex eta = p->eta[q];
  fill_far(p, q);
  double complex known = far_edges(p, ratio);
  for (int k = 0; k < side; k++) {
    known +=
        ratio * p->far_hat[0][k] * p->far_hat[0][k] + p->far_hat[1][k] * p->far_hat[1][k] / ratio;
    p->matrix[(first + k) * (size + 1)] += eta / ratio;
    p->matrix[(second + k) * (size + 1)] += eta * ratio;
  }
  for (int k = 0; k < side; k++) {
    double sk = sine_of(p, k + 1, 1), sign_k = k % 2 == 0 ? 1 : -1;
    for (int l = 0; l < side; l++) {
      double sl = sine_of(p, l + 1, 1), sign_l = l % 2 == 0 ? 1 : -1;
      double green = 1 / (ratio * p->lambda[k] + p->lambda[l] / ratio);
      double complex r =
          ratio * sk * sign_k * p->far_hat[0][l] + sl * sign_l * p->far_hat[1][k] / ratio;
      known -= r * r * green;
      p->matrix[(first + k) * (size + 1)] -= eta * sl * sl * green / (ratio * ratio);
      p->matrix[(second + l) * (size + 1)] -= eta * sk * sk * green * ratio * ratio;
      p->matrix[(first + k) + (second + l) * size] -= eta * sk * sl * green;
      p->matrix[(second + l) + (first + k) * size] -= eta * sk * sl * green;
      p->right[first + k] += eta * sl * r * green / ratio;
      p->right[second + l] += eta * sk * r * green * ratio;
    }
  }
  p->constant += eta * known;
}

/* Adds the edges along arm e, which the quadrants on its two sides share. */
static void add_arm(patch *p, int e) {
  int side = p->side, size = p->size, first = e * side, before = (e + 3) % 4;
  double complex weight =
      0.5 * (p->eta[e] * p->spacing[(e + 1) % 4] + p->eta[before] * p->spacing[before]) /
      p->spacing[e];
  double complex end = singular_at(p, e, p->n * p->spacing[e], 0);
  for (int k = 0; k < side; k++) {
    double s = sine_of(p, k + 1, 1), sign = k % 2 == 0 ? 1 : -1;
    p->matrix[(first + k) * (size + 1)] += weight * p->lambda[k];
    p->matrix[(first + k) + (size - 1) * size] -= weight * s;
    p->matrix[(size - 1) + (first + k) * size] -= weight * s;
    p->right[first + k] += weight * s * sign * end;
    p->right[(e + 1) * size + first + k] = s;
  }
  p->right[(e + 1) * size + size - 1] = -1;
  p->matrix[size * size - 1] += weight;
  p->constant += weight * end * end;
  p->weight[e] = weight;
}

/* ∫ (cosh s)^{2α-1} ds from 0 to `end` by the midpoint rule with Richardson steps (Romberg). */
static double complex cosh_integral(double complex alpha, double end) {
  enum { LEVELS = 7 }; /* 256 points: rounding level for sides up to 1:50 */
  double complex table[LEVELS];
  for (int level = 0; level < LEVELS; level++) {
    int count = 4 << level;
    double step = end / count;
    double complex sum = 0;
    for (int i = 0; i < count; i++) {
      sum += cpow(cosh((i + 0.5) * step), 2 * alpha - 1);
    }
    double complex value = sum * step;
    double power = 4;
    for (int j = 0; j < level; j++, power *= 4) {
      double complex finer = value + (value - table[j]) / (power - 1);
      table[j] = value;
      value = finer;
    }
    table[level] = value;
  }
  return table[LEVELS - 1];
}

/* ∫ η|∇u|² over the patch. In polar coordinates it is (α/2) Σ η (a² + b²) ∫ R(θ)^{2α} dθ with R the
 * distance of the boundary; a side at distance X and of length Y gives X^{2α} ∫ cosh^{2α-1}, by
 * tan θ = sinh s. */
static double complex exact_energy(const patch *p) {
  double complex sum = 0;
  for (int q = 0; q < 4; q++) {
    double x = p->n * p->spacing[q], y = p->n * p->spacing[(q + 1) % 4];
    double complex reach = cpow(x, 2 * p->alpha) * cosh_integral(p->alpha, asinh(y / x)) +
                           cpow(y, 2 * p->alpha) * cosh_integral(p->alpha, asinh(x / y));
    sum += p->eta[q] * (p->a[q] * p->a[q] + p->b[q] * p->b[q]) * reach;
  }
  return 0.5 * p->alpha * sum;
}

/* The least energy as a function of c: with y = A⁻¹b, P = DᵀA⁻¹D, r = Dᵀy and the weights W,
 *   E(c) = d - bᵀy + c rᵀW (1 + c P W)⁻¹ r. */
typedef struct response {
  double complex plain;
  double complex r[EDGES], p[EDGES][EDGES], weight[EDGES];
} response;

static double complex response_at(const response *f, double complex c) {
  double complex m[EDGES][EDGES + 1];
  for (int i = 0; i < EDGES; i++) {
    for (int j = 0; j < EDGES; j++) {
      m[i][j] = (i == j) + c * f->p[i][j] * f->weight[j];
    }
    m[i][EDGES] = f->r[i];
  }
  for (int k = 0; k < EDGES; k++) { /* near the identity: no exchange of rows needed */
    for (int i = 0; i < EDGES; i++) {
      double complex factor = i == k ? 0 : m[i][k] / m[k][k];
      for (int j = k; j <= EDGES; j++) {
        m[i][j] -= factor * m[k][j];
      }
    }
  }
  double complex sum = 0;
  for (int i = 0; i < EDGES; i++) {
    sum += f->r[i] * f->weight[i] * m[i][EDGES] / m[i][i];
  }
  return f->plain + c * sum;
}

static double complex inner(int n, const double complex *x, const double complex *y) {
  double complex sum = 0;
  for (int i = 0; i < n; i++) {
    sum += x[i] * y[i];
  }
  return sum;
}

static picket_status solve_patch(patch *p, response *out) {
  int size = p->size;
  double complex *solved = pk_copy(p->context, p->right, (size_t)(size * COLUMNS), sizeof *solved);
  if (!solved) {
    return PICKET_ERROR_MEMORY;
  }
  picket_status status = pk_dense_lu(p->context, size, p->matrix, p->pivots);
  if (status == PICKET_OK) {
    pk_dense_lu_solve(size, p->matrix, p->pivots, COLUMNS, solved);
    out->plain = p->constant - inner(size, p->right, solved) - exact_energy(p);
    for (int i = 0; i < EDGES; i++) {
      const double complex *d = p->right + (i + 1) * size;
      out->weight[i] = p->weight[i];
      out->r[i] = inner(size, d, solved);
      for (int j = 0; j < EDGES; j++) {
        out->p[i][j] = inner(size, d, solved + (j + 1) * size);
      }
    }
  }
  pk_free(p->context, solved);
  return status;
}

static picket_status respond(picket_context *context, const pk_corner_site *site,
                             double complex alpha, int n, response *out) {
  patch p;
  picket_status status = patch_open(context, site, alpha, n, &p);
  if (status != PICKET_OK) {
    return status;
  }
  for (int q = 0; q < 4; q++) {
    add_quadrant(&p, q);
    add_arm(&p, q);
  }
  status = solve_patch(&p, out);
  patch_close(&p);
  return status;
}

picket_status pk_corner_patch_excess(picket_context *context, const pk_corner_site *site,
                                     double complex alpha, int n, int count,
                                     const double complex *c, double complex *excess) {
  response f;
  picket_status status = respond(context, site, alpha, n, &f);
  for (int i = 0; status == PICKET_OK && i < count; i++) {
    excess[i] = response_at(&f, c[i]);
  }
  return status;
}

/* --- The correction
 * --------------------------------------------------------------------------------- */

enum { PATCHES = 3, SECANT_STEPS = 40 };

/* Cells along an arm. Measured: c from 8, 16, 32 differs from that of 48, 96, 192 by 5e-8 (square)
 * to 4e-7 (spacings 1:2); at 1:5 by 1e-5, so uneven corners take twice as many. */
static const int CELLS[PATCHES] = {8, 16, 32};
static const double UNEVEN = 3;

/* An exponent this close to 1 is not told from the order 2 of the scheme, and the fit in n^{2α-2}
 * loses its digits; c is about (1 - α)/2 there, a thousandth of what matters. */
static const double SMOOTH_EXPONENT = 1e-3;

/* Weights w with Σ w_i K(n_i) = K(∞) for K = K(∞) + a n^{2α-2} + b n^{2α-4}: a 3 × 3 system, by
 * Cramer. */
static void limit_weights(double complex alpha, double complex w[PATCHES]) {
  double complex f[PATCHES], g[PATCHES], sum = 0;
  for (int i = 0; i < PATCHES; i++) {
    double n = (double)CELLS[i] / CELLS[0];
    f[i] = cpow(n, 2 * alpha - 2);
    g[i] = cpow(n, 2 * alpha - 4);
  }
  for (int i = 0; i < PATCHES; i++) {
    int j = (i + 1) % PATCHES, k = (i + 2) % PATCHES;
    w[i] = f[j] * g[k] - f[k] * g[j];
    sum += w[i];
  }
  for (int i = 0; i < PATCHES; i++) {
    w[i] /= sum;
  }
}

static double complex limit_at(const response f[PATCHES], const double complex w[PATCHES],
                               double complex c) {
  double complex sum = 0;
  for (int i = 0; i < PATCHES; i++) {
    sum += w[i] * response_at(&f[i], c);
  }
  return sum;
}

/* The zero of K(c, ∞) by the secant method: for positive ε it rises and bends down on (-1, 0]. */
static bool find_zero(const response f[PATCHES], const double complex w[PATCHES],
                      double complex *out) {
  double complex before = 0, c = -0.1;
  double complex value_before = limit_at(f, w, before);
  for (int i = 0; i < SECANT_STEPS; i++) {
    double complex value = limit_at(f, w, c);
    double complex step = value * (c - before) / (value - value_before);
    before = c;
    value_before = value;
    c -= step;
    if (!(cabs(c) < 1)) {
      return false;
    }
    if (cabs(step) < 1e-13) {
      *out = c;
      return true;
    }
  }
  return false;
}

static picket_status solve_correction(picket_context *context, const pk_corner_site *site,
                                      double complex alpha, double complex *c, bool *known) {
  double least =
      fmin(fmin(site->spacing[0], site->spacing[1]), fmin(site->spacing[2], site->spacing[3]));
  double most =
      fmax(fmax(site->spacing[0], site->spacing[1]), fmax(site->spacing[2], site->spacing[3]));
  int multiple = most > UNEVEN * least ? 2 : 1;
  response f[PATCHES];
  for (int i = 0; i < PATCHES; i++) {
    picket_status status = respond(context, site, alpha, multiple * CELLS[i], &f[i]);
    if (status != PICKET_OK) {
      return status;
    }
  }
  double complex w[PATCHES];
  limit_weights(alpha, w);
  *known = find_zero(f, w, c);
  return PICKET_OK;
}

picket_status pk_corner_correction(picket_context *context, const pk_corner_site *site,
                                   pk_corner_cure *out) {
  pk_corner_cure cure = {.alpha = 1, .c = 0, .known = false};
  pk_sectors sectors = {.count = 4};
  for (int q = 0; q < 4; q++) {
    sectors.angle[q] = QUARTER_TURN;
    sectors.permittivity[q] = site->permittivity[q];
  }
  double complex alpha[PK_CORNER_EXPONENTS];
  int count = pk_corner_exponents(&sectors, alpha);
  picket_status status = PICKET_OK;
  if (count > 0 && creal(alpha[0]) > 1 - SMOOTH_EXPONENT) {
    cure.known = true;
  } else if (count > 0) {
    status = solve_correction(context, site, alpha[0], &cure.c, &cure.known);
    cure.alpha = cure.known ? alpha[0] : 1;
  }
  bool lossless = true;
  for (int q = 0; q < 4; q++) {
    lossless = lossless && cimag(site->permittivity[q]) == 0;
  }
  if (lossless) { /* so that a real operator stays real to the last bit */
    cure.alpha = creal(cure.alpha);
    cure.c = creal(cure.c);
  }
  if (status == PICKET_OK) {
    *out = cure;
  }
  return status;
}
