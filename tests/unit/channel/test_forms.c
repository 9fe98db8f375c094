/* Forms of channels: symmetry of the matrix, products without it, and derivatives of modes against
 * modes of changed channels. */
#include "channel/forms.h"

#include <stdlib.h>

#include "unit/channel/guide.h"

static const double PITCH = 0.3;
static const double complex SILICON[PLANE_MEDIA] = {1.4440, 3.4757, 2};

static void random_vector(uint64_t *state, int64_t n, double complex *x) {
  for (int64_t i = 0; i < 2 * n; i++) {
    *state = *state * 6364136223846793005u + 1442695040888963407u;
    ((double *)x)[i] = (double)(*state >> 11) / 9007199254740992.0 - 0.5;
  }
}

static double complex dot(int64_t n, const double complex *a, const double complex *b) {
  double complex sum = 0;
  for (int64_t i = 0; i < n; i++) {
    sum += a[i] * b[i];
  }
  return sum;
}

/* A cell without any symmetry: a tooth, a disc beside it (oblique nodes), an absorbing medium and
 * an absorbing layer. */
static guide crooked(int slices) {
  const double complex index[PLANE_MEDIA] = {1.444, 3.4757, 2.1 + 0.1 * I};
  guide g = {.pitch = PITCH, .slices = slices, .from = {-0.1, 0.02, 0.09}};
  g.from[slices] = g.from[0] + PITCH;
  for (int i = 0; i < slices; i++) {
    g.plane[i] = i == 0 ? plane_of(index, 0) : plane_in(g.plane[0].context, index, 0);
  }
  plane_rect(&g.plane[0], 1, 0.05, 0.02, 0.4, 0.2);
  plane_disc(&g.plane[1], 2, 0.3);
  ruler r = {PK_END_ZERO, PK_END_FREE, -0.5, 0.6, 9, 0.1, 0.1, 2, {-0.15, 0.25}};
  lay_ruler(g.plane[0].context, &r, &g.plane[0].x);
  pk_axis_wish wish = {.low = PK_END_FREE,
                       .high = PK_END_ZERO,
                       .from = -0.5,
                       .to = 0.5,
                       .line_count = 2,
                       .lines = (const double[]){-0.08, 0.12},
                       .step = 0.1,
                       .inner_from = -1,
                       .inner_to = 1,
                       .outer_step = 0.1,
                       .growth = 0.2,
                       .layer = {{0.2, 3}, {0, 0}},
                       .least_intervals = 1};
  assert_int_equal(pk_axis_lay(g.plane[0].context, &wish, &g.plane[0].y), PICKET_OK);
  return g;
}

/* The stored matrix is the product; Tᵀ is its transpose; lᵀTr is both. To rounding of entries of
 * 1e3 in sums of 1e4. */
static void matrix_and_products_agree(void **state) {
  (void)state;
  guide g = crooked(3);
  pk_channel *c = guide_channel(&g, 1, -2, 1);
  int64_t n = pk_channel_size(c);
  const pk_pattern *pattern = pk_channel_pattern(c);
  double complex *values = malloc((size_t)pattern->start[n] * sizeof *values);
  double complex *x = malloc(4 * (size_t)n * sizeof *x), *y = x + n, *u = y + n, *v = u + n;
  uint64_t seed = 7;
  assert_false(pk_channel_is_mirrored(c));
  assert_false(pk_channel_is_real(c));
  random_vector(&seed, 2 * n, x);
  const double complex k = 6 + 0.3 * I, k0_square = 17;
  pk_channel_values(c, k, k0_square, values);
  pk_sparse_times_complex(pattern, values, x, u);
  pk_channel_times(c, k, k0_square, x, v);
  double size = 0, wrong = 0, wrong_transposed = 0;
  for (int64_t i = 0; i < n; i++) {
    size = fmax(size, cabs(u[i]));
    wrong = fmax(wrong, cabs(u[i] - v[i]));
  }
  assert_near(wrong, 0, 1e-13 * size);
  assert_near(cabs(dot(n, y, u) / pk_channel_form(c, k, k0_square, y, x) - 1), 0, 1e-12);
  pk_sparse_transposed_times_complex(pattern, values, x, u);
  pk_channel_transposed_times(c, k, k0_square, x, v);
  for (int64_t i = 0; i < n; i++) {
    wrong_transposed = fmax(wrong_transposed, cabs(u[i] - v[i]));
  }
  assert_near(wrong_transposed, 0, 1e-13 * size);
  assert_true(cabs(pk_channel_mass_form(c, x, y) / pk_channel_mass_form(c, y, x) - 1) > 1e-3);
  free(values);
  free(x);
  pk_channel_free(c);
  guide_close(&g);
}

/* The curl part is symmetric under transposition for any channel; with a mirror plane in z the mass
 * is too, also with an oblique interface and an absorbing layer; a lossless one is Hermitian
 * without. */
static void symmetries(void **state) {
  (void)state;
  for (int example = 0; example < 2; example++) {
    guide g = crooked(example == 0 ? 2 : 3); /* two slices always have a mirror plane */
    if (example == 1) {                      /* no loss, no layer */
      const double complex index[PLANE_MEDIA] = {1.444, 3.4757, 2.1};
      plane_media(&g.plane[0], index);
      for (int i = 0; i < g.plane[0].y.intervals; i++) {
        g.plane[0].y.length[i] = creal(g.plane[0].y.length[i]);
      }
      g.plane[0].y.layer[0].thickness = 0;
    }
    pk_channel *c = guide_channel(&g, 1, -2, 1);
    int64_t n = pk_channel_size(c);
    double complex *x = malloc(2 * (size_t)n * sizeof *x), *y = x + n;
    uint64_t seed = 11;
    random_vector(&seed, 2 * n, x);
    assert_true(pk_channel_is_mirrored(c) == (example == 0));
    double complex there = pk_channel_form(c, 6, 17, x, y);
    if (example == 0) {
      assert_near(cabs(there / pk_channel_form(c, 6, 17, y, x) - 1), 0, 1e-12);
    } else {
      for (int64_t i = 0; i < 2 * n; i++) {
        x[i] = conj(x[i]);
      }
      assert_near(cabs(conj(there) / pk_channel_form(c, 6, 17, y, x) - 1), 0, 1e-12);
    }
    free(x);
    pk_channel_free(c);
    guide_close(&g);
  }
}

/* dk0/dk and dk0/dε against modes of changed channels, by differences of fourth order: h⁴ of a
 * step of 1e-2 and 1e-12 of the modes over it. */
static double k0_at(guide *g, int medium, double change, double k) {
  double complex old = g->plane[0].permittivity[medium];
  for (int i = 0; i < 3; i++) {
    g->plane[0].permittivity[i * PLANE_MEDIA + medium] += change;
  }
  pk_channel *c = guide_channel(g, 1, -3, 2);
  for (int i = 0; i < 3; i++) {
    g->plane[0].permittivity[i * PLANE_MEDIA + medium] = old;
  }
  pk_channel_mode mode = guide_mode_at_k(c, k, k / 1.68);
  double k0 = sqrt(creal(mode.k0_square));
  pk_channel_modes_clear(g->plane[0].context, 1, &mode);
  pk_channel_free(c);
  return k0;
}

static void derivatives_are_differences(void **state) {
  (void)state;
  const double k = 0.7 * PI / PITCH, step = 1e-2;
  guide g = guide_of_teeth(SILICON, PITCH, 0.15, PK_END_ZERO, PK_END_FREE, 0.8);
  pk_channel *c = guide_channel(&g, 1, -3, 2);
  pk_channel_mode mode = guide_mode_at_k(c, k, k / 1.68);
  double k0 = sqrt(creal(mode.k0_square));
  double complex by_k0, pulls[PLANE_MEDIA];
  assert_int_equal(pk_channel_k0_form(c, k0, NULL, mode.left, mode.right, &by_k0), PICKET_OK);
  assert_int_equal(pk_channel_pulls(c, mode.k0_square, mode.left, mode.right, pulls), PICKET_OK);
  double slope = creal(-pk_channel_k_form(c, k, mode.left, mode.right) / by_k0);
  double known = (8 * (k0_at(&g, 0, 0, k + step) - k0_at(&g, 0, 0, k - step)) -
                  (k0_at(&g, 0, 0, k + 2 * step) - k0_at(&g, 0, 0, k - 2 * step))) /
                 (12 * step);
  assert_near(slope / known, 1, 1e-7);
  for (int medium = 0; medium < 2; medium++) {
    known = (8 * (k0_at(&g, medium, step, k) - k0_at(&g, medium, -step, k)) -
             (k0_at(&g, medium, 2 * step, k) - k0_at(&g, medium, -2 * step, k))) /
            (12 * step);
    assert_near(creal(-pulls[medium] / by_k0) / known, 1, 1e-6);
  }
  assert_true(pulls[2] == 0);
  pk_channel_modes_clear(g.plane[0].context, 1, &mode);
  pk_channel_free(c);
  guide_close(&g);
}

/* Pulls and dispersion are one thing: media that all follow dε/dk0 = 2ε/k0 scale the frequency. */
static void dispersion_is_a_pull(void **state) {
  (void)state;
  guide g = guide_of_teeth(SILICON, PITCH, 0.15, PK_END_FREE, PK_END_ZERO, 0.8);
  pk_channel *c = guide_channel(&g, 1, -2, 1);
  pk_channel_mode mode = guide_mode_at_k(c, 6, 4);
  double k0 = sqrt(creal(mode.k0_square));
  double complex slope[3 * PLANE_MEDIA], plain, all;
  for (int i = 0; i < 3 * PLANE_MEDIA; i++) {
    slope[i] = 2 * g.plane[0].permittivity[i];
  }
  assert_int_equal(pk_channel_k0_form(c, k0, NULL, mode.left, mode.right, &plain), PICKET_OK);
  assert_int_equal(pk_channel_k0_form(c, k0, slope, mode.left, mode.right, &all), PICKET_OK);
  assert_near(creal(all / plain), 2, 1e-9);
  pk_channel_modes_clear(g.plane[0].context, 1, &mode);
  pk_channel_free(c);
  guide_close(&g);
}

/* te-like and tm-like teeth by their stronger component. */
static void looks_tell_the_families(void **state) {
  (void)state;
  for (int tm = 0; tm < 2; tm++) {
    guide g = guide_of_teeth(SILICON, PITCH, 0.15, tm ? PK_END_FREE : PK_END_ZERO,
                             tm ? PK_END_ZERO : PK_END_FREE, 1.2);
    pk_channel *c = guide_channel(&g, 1, -2, 1);
    double k = 0.7 * PI / PITCH;
    pk_channel_mode mode = guide_mode_at_k(c, k, k / (tm ? 1.53 : 1.68));
    pk_channel_looks looks;
    pk_channel_look(c, mode.right, &looks);
    assert_true(tm ? looks.ex_share < 0.1 : looks.ex_share > 0.9);
    assert_true(looks.ez_share > 0.05 && looks.ez_share < 0.5);
    assert_near(pk_channel_overlap(c, mode.right, mode.right), 1, 1e-12);
    pk_channel_modes_clear(g.plane[0].context, 1, &mode);
    pk_channel_free(c);
    guide_close(&g);
  }
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(matrix_and_products_agree),   cmocka_unit_test(symmetries),
      cmocka_unit_test(derivatives_are_differences), cmocka_unit_test(dispersion_is_a_pull),
      cmocka_unit_test(looks_tell_the_families),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
