/* The values of the operator: symmetries to the last bit, and the spectra of empty cells, which are
 * known in closed form on any even grid:
 *   λ = (4/hz² sin²(κz hz/2) + 4/hx² sin²(κx hx/2)) / ε. */
#include "dense/dense.h"
#include "unit/operator/samples.h"

/* Real k and no loss: T = Tᴴ, compared by ==. */
static void real_wavenumbers_give_hermitian_matrices_to_the_last_bit(void **state) {
  (void)state;
  for (int k = 0; k < 2 * SAMPLE_COUNT; k++) {
    test_cell c = sample(k / 2, (pk_polarization)(k % 2));
    for (int i = 0; i < 8; i++) {
      size_t n = (size_t)pk_operator_size(c.op);
      double complex *t = dense_of(c.op, pk_phase_at(&c.cell, 0.13 + 0.29 * i, 0.41 * i), 3.7);
      for (size_t a = 0; a < n; a++) {
        for (size_t b = 0; b <= a; b++) {
          assert_true(t[a + b * n] == conj(t[b + a * n]));
        }
      }
      free(t);
    }
    cell_close(&c);
  }
}

/* T(ξ, χ)ᵀ = T(1/ξ, 1/χ) with loss and complex k. 1e-15 of the largest entry: 1/(1/ξ) rounds. */
static void transposing_inverts_the_phases(void **state) {
  (void)state;
  for (int k = 0; k < 2 * SAMPLE_COUNT; k++) {
    test_cell c = sample(k / 2, (pk_polarization)(k % 2));
    double complex permittivity[3] = {2 + 0.1 * I, -3 + 2 * I, 7 + 0.3 * I};
    pk_operator_load(c.op, permittivity);
    assert_false(pk_operator_is_real(c.op));
    pk_phase phase = sample_phase(&c), inverse;
    phase.xi *= 0.6;
    phase.chi *= 1.3;
    inverse = (pk_phase){1 / phase.xi, 1 / phase.chi, phase.kx};
    size_t n = (size_t)pk_operator_size(c.op);
    double complex *t = dense_of(c.op, phase, 3.7), *s = dense_of(c.op, inverse, 3.7);
    double scale = largest((int64_t)(n * n), t);
    for (size_t a = 0; a < n; a++) {
      for (size_t b = 0; b < n; b++) {
        assert_true(cabs(t[a + b * n] - s[b + a * n]) <= 1e-15 * scale);
      }
    }
    free(t);
    free(s);
    cell_close(&c);
  }
}

static void real_values_are_those_of_the_complex_matrix(void **state) {
  (void)state;
  for (int k = 0; k < 2 * SAMPLE_COUNT; k++) {
    test_cell c = sample(k / 2, (pk_polarization)(k % 2));
    int64_t entries = pk_operator_pattern(c.op)->start[pk_operator_size(c.op)];
    double *real = malloc((size_t)entries * sizeof *real);
    double complex *values = malloc((size_t)entries * sizeof *values);
    assert_true(pk_operator_is_real(c.op));
    for (int i = 0; i < 4; i++) {
      pk_phase phase = {i % 2 ? -1 : 1, i / 2 ? -1 : 1, 0.7};
      pk_operator_values_real(c.op, phase, 5.1, real);
      pk_operator_values(c.op, phase, 5.1, values);
      for (int64_t s = 0; s < entries; s++) {
        assert_true(real[s] == creal(values[s]) && cimag(values[s]) == 0);
      }
    }
    free(real);
    free(values);
    cell_close(&c);
  }
}

/* T(ξ) = ξ C₊ + K + C₋/ξ: the difference of two phases holds the wrapped parts only. */
static void the_wrapped_parts_make_up_the_matrix(void **state) {
  (void)state;
  uint64_t seed = 7;
  for (int k = 0; k < 2 * SAMPLE_COUNT; k++) {
    test_cell c = sample(k / 2, (pk_polarization)(k % 2));
    const pk_pattern *p = pk_operator_pattern(c.op);
    double complex *values = malloc((size_t)p->start[p->n] * sizeof *values);
    double complex *work = malloc(5 * (size_t)p->n * sizeof *work);
    double complex *x = work, *one = x + p->n, *two = one + p->n, *up = two + p->n,
                   *down = up + p->n;
    random_vector(&seed, p->n, x);
    pk_phase a = sample_phase(&c), b = a;
    b.xi = -0.4 + 0.2 * I;
    pk_operator_values(c.op, a, 2, values);
    pk_sparse_times_complex(p, values, x, one);
    pk_operator_values(c.op, b, 2, values);
    pk_sparse_times_complex(p, values, x, two);
    pk_operator_forward_times(c.op, a.chi, x, up);
    pk_operator_backward_times(c.op, a.chi, x, down);
    double scale = largest(p->n, two);
    for (int64_t i = 0; i < p->n; i++) {
      double complex expected = (b.xi - a.xi) * up[i] + (1 / b.xi - 1 / a.xi) * down[i];
      assert_true(cabs(two[i] - one[i] - expected) < 1e-14 * scale);
    }
    free(values);
    free(work);
    cell_close(&c);
  }
}

static int rising(const void *a, const void *b) {
  double x = *(const double *)a, y = *(const double *)b;
  return (x > y) - (x < y);
}

/* The spectrum of B^-½ A B^-½. */
static void whole_spectrum(test_cell *c, pk_phase phase, double *values) {
  int n = (int)pk_operator_size(c->op);
  const double complex *mass = pk_operator_mass(c->op);
  double complex *a = dense_of(c->op, phase, 0);
  for (int i = 0; i < n; i++) {
    for (int j = 0; j < n; j++) {
      a[i + (size_t)j * (size_t)n] /= sqrt(creal(mass[i]) * creal(mass[j]));
    }
  }
  assert_int_equal(pk_dense_hermitian(c->context, n, a, values), PICKET_OK);
  free(a);
}

static double of_wave(double kappa, double h) {
  double s = sin(0.5 * kappa * h);
  return 4 * s * s / (h * h);
}

static void compare(test_cell *c, pk_phase phase, int n, double *expected) {
  double *values = malloc((size_t)n * sizeof *values);
  assert_int_equal(pk_operator_size(c->op), n);
  whole_spectrum(c, phase, values);
  qsort(expected, (size_t)n, sizeof *expected, rising);
  for (int i = 0; i < n; i++) {
    assert_near(values[i], expected[i], 1e-13 * expected[n - 1]);
  }
  free(values);
}

static const double EMPTY = 1.7;

/* Two periods, with and without a lateral shift: plane waves with κ = k + G of the lattice. */
static void empty_lattices_have_the_discrete_plane_waves(void **state) {
  (void)state;
  enum { NU = 12, NV = 8 };
  static const double SHIFT[] = {0, 0.5, 1.0 / 3, 0.25};
  static const double K[][2] = {{0, 0}, {1, 0}, {0.37, 0.61}, {-0.2, 1}};
  double pitch = 0.6, span = 0.5, hz = pitch / NU, hx = span / NV;
  for (int k = 0; k < 32; k++) {
    double shift = SHIFT[k % 4], kz = K[k / 8][0], kx = K[k / 8][1];
    test_cell c = cell_of(PK_LATERAL_PERIODIC, pitch, span, shift, 1, &EMPTY);
    cell_lay_even(&c, NU, NV);
    cell_open(&c, (pk_polarization)(k / 4 % 2), 1, 4);
    double expected[NU * NV];
    for (int a = 0; a < NU; a++) {
      for (int b = 0; b < NV; b++) {
        double z = (kz + 2 * a) * PI / pitch, x = (kx + 2 * (b - a * shift)) * PI / span;
        expected[a * NV + b] = (of_wave(z, hz) + of_wave(x, hx)) / (EMPTY * EMPTY);
      }
    }
    compare(&c, pk_phase_at(&c.cell, kz, kx), NU * NV, expected);
    cell_close(&c);
  }
}

/* Walls: sines between zeros, cosines between free ends, quarter waves between one of each. */
static void empty_strips_have_standing_waves_across(void **state) {
  (void)state;
  enum { NU = 7, NV = 6 };
  double pitch = 0.6, span = 0.5, hz = pitch / NU, hx = span / NV;
  static const pk_end ENDS[][2] = {{PK_END_ZERO, PK_END_ZERO},
                                   {PK_END_FREE, PK_END_FREE},
                                   {PK_END_FREE, PK_END_ZERO},
                                   {PK_END_ZERO, PK_END_FREE}};
  for (int k = 0; k < 8; k++) {
    const pk_end *ends = ENDS[k / 2];
    test_cell c = cell_of(PK_LATERAL_ELECTRIC, pitch, span, 0, 1, &EMPTY);
    cell_lay_even(&c, NU, NV);
    c.base.v.low = ends[0];
    c.base.v.high = ends[1];
    cell_open(&c, (pk_polarization)(k % 2), 1, 4);
    int nv = NV + 1 - (ends[0] == PK_END_ZERO) - (ends[1] == PK_END_ZERO);
    double first = ends[0] != ends[1] ? 0.5 : ends[0] == PK_END_ZERO ? 1 : 0;
    double expected[NU * (NV + 1)];
    for (int a = 0; a < NU; a++) {
      for (int b = 0; b < nv; b++) {
        double z = (0.37 + 2 * a) * PI / pitch, x = (first + b) * PI / span;
        expected[a * nv + b] = (of_wave(z, hz) + of_wave(x, hx)) / (EMPTY * EMPTY);
      }
    }
    compare(&c, pk_phase_at(&c.cell, 0.37, 0), NU * nv, expected);
    cell_close(&c);
  }
}

/* A stack crossed obliquely: kx² adds to the wave along z. */
static void empty_stacks_take_kx(void **state) {
  (void)state;
  enum { NU = 11 };
  for (int k = 0; k < 2; k++) {
    test_cell c = cell_of(PK_LATERAL_UNIFORM, 0.6, 0, 0, 1, &EMPTY);
    c.cell.span_um = 0.5; /* the unit of kx */
    cell_lay_even(&c, NU, 1);
    cell_open(&c, (pk_polarization)k, 1, 4);
    double expected[NU], kx = 0.8 * PI / 0.5;
    for (int a = 0; a < NU; a++) {
      expected[a] = (of_wave((0.37 + 2 * a) * PI / 0.6, 0.6 / NU) + kx * kx) / (EMPTY * EMPTY);
    }
    compare(&c, pk_phase_at(&c.cell, 0.37, 0.8), NU, expected);
    cell_close(&c);
  }
}

/* Triangular lattice, k = 0: six shortest vectors G of one length. On a rectangular grid they are
 * four and two, exactly, and the two levels meet as h². */
static void the_empty_triangular_lattice_folds_sixfold(void **state) {
  (void)state;
  double gap[2];
  for (int m = 1; m <= 2; m++) {
    test_cell c = cell_of(PK_LATERAL_PERIODIC, 1, 0.5 * sqrt(3), 0.5, 1, &EMPTY);
    cell_lay_even(&c, 10, 8);
    cell_open(&c, PK_EY, m, 4);
    double *values = malloc((size_t)pk_operator_size(c.op) * sizeof *values);
    whole_spectrum(&c, (pk_phase){1, 1, 0}, values);
    assert_near(values[0], 0, 1e-10);
    bool two_first = values[3] - values[2] > values[2] - values[1] + 1e-9;
    int split = two_first ? 2 : 4;
    assert_near(values[split], values[1], 1e-10);
    assert_near(values[6], values[split + 1], 1e-10);
    gap[m - 1] = values[6] - values[1];
    double exact = 4 * PI * PI * 4 / 3 / (EMPTY * EMPTY);
    assert_near(values[1], exact, 0.1 * exact / (m * m)); /* error h² G²/12 and its cross term */
    assert_true(values[7] > 2 * exact);                   /* the next shell is at 3 */
    free(values);
    cell_close(&c);
  }
  assert_near(gap[0] / gap[1], 4, 0.3);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(real_wavenumbers_give_hermitian_matrices_to_the_last_bit),
      cmocka_unit_test(transposing_inverts_the_phases),
      cmocka_unit_test(real_values_are_those_of_the_complex_matrix),
      cmocka_unit_test(the_wrapped_parts_make_up_the_matrix),
      cmocka_unit_test(empty_lattices_have_the_discrete_plane_waves),
      cmocka_unit_test(empty_strips_have_standing_waves_across),
      cmocka_unit_test(empty_stacks_take_kx),
      cmocka_unit_test(the_empty_triangular_lattice_folds_sixfold),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
