/* What the operator is, whatever the numbers: pattern, area sums, media used, memory. */
#include "dense/dense.h"
#include "operator/operator_private.h"
#include "unit/operator/samples.h"
#include "unit/short_memory.h"

static void the_pattern_is_sorted_and_symmetric(void **state) {
  (void)state;
  for (int k = 0; k < 2 * SAMPLE_COUNT; k++) {
    test_cell c = sample(k / 2, (pk_polarization)(k % 2));
    const pk_pattern *p = pk_operator_pattern(c.op);
    int nu = pk_operator_lines(c.op, PK_U), nv = pk_operator_lines(c.op, PK_V);
    assert_int_equal(p->n, (int64_t)nu * nv);
    assert_int_equal(p->n, pk_operator_size(c.op));
    for (int64_t column = 0; column < p->n; column++) {
      bool diagonal = false;
      for (int64_t s = p->start[column]; s < p->start[column + 1]; s++) {
        assert_true(s == p->start[column] || p->row[s] > p->row[s - 1]);
        diagonal = diagonal || p->row[s] == column;
        int64_t row = p->row[s], other = p->start[row];
        while (other < p->start[row + 1] && p->row[other] != column) {
          other++;
        }
        assert_true(other < p->start[row + 1]);
      }
      assert_true(diagonal);
    }
    cell_close(&c);
  }
}

static double mass_total(const test_cell *c) {
  double sum = 0;
  for (int64_t p = 0; p < pk_operator_size(c->op); p++) {
    sum += creal(pk_operator_mass(c->op)[p]);
  }
  return sum;
}

/* Dual cells cover a periodic cell once, so the masses of ey add up to ∫ε dA and those of hy to the
 * area; an overlapping rectangle, a disc and a triangle have closed areas. 1e-13: rounding. */
static void masses_add_up_to_the_integral(void **state) {
  (void)state;
  double e0 = 1.3 * 1.3, e1 = 3.4 * 3.4, e2 = 2.1 * 2.1, area = 0.6 * 0.8;
  static const double TRIANGLE[3][2] = {{-0.25, -0.3}, {0.05, -0.25}, {-0.1, 0.1}};
  double triangle = 0.5 * fabs((0.05 + 0.25) * (0.1 + 0.3) - (-0.1 + 0.25) * (-0.25 + 0.3));
  for (int shifted = 0; shifted < 2; shifted++) {
    for (int polarization = 0; polarization < 2; polarization++) {
      test_cell c = cell_of(PK_LATERAL_PERIODIC, 0.6, 0.8, 0.5 * shifted, 3, SAMPLE_INDEX);
      cell_rect(&c, 1, 0.25, 0.35, 0.3, 0.2); /* across both boundaries */
      cell_disc(&c, 2, 0.1, -0.1, 0.2);
      cell_polygon(&c, 1, 3, TRIANGLE);
      pk_cell_grid_wish wish = {.steps_per_pitch = 9};
      cell_lay(&c, &wish);
      cell_open(&c, (pk_polarization)polarization, 1, 4);
      double one = area, disc = PI * 0.01, high = 0.3 * 0.2 + triangle;
      double integral = e0 * (one - disc - high) + e1 * high + e2 * disc;
      /* The disc and the triangle overlap where 1 covers 2; take that from an exact box. */
      pk_box box;
      assert_int_equal(
          pk_geometry_box(c.cell.geometry, (double[2]){-0.3, -0.4}, (double[2]){0.3, 0.4}, &box),
          PICKET_OK);
      double disc_left = box.fraction[2] * area;
      assert_true(disc_left <= disc + 1e-13);
      integral += (e0 - e2) * (disc - disc_left);
      assert_near(mass_total(&c), polarization == PK_EY ? integral : area, 1e-13);
      cell_close(&c);
    }
  }
}

/* A constant H (or E) has no energy at k = 0: every row of A sums to zero. Along walls this holds
 * where they leave the slope zero. 1e-12 of the largest entry: rounding of nine terms. */
static void constant_fields_cost_nothing(void **state) {
  (void)state;
  for (int k = 0; k < 2 * SAMPLE_COUNT; k++) {
    test_cell c = sample(k / 2, (pk_polarization)(k % 2));
    if (c.grid.v.low != PK_END_ZERO) {
      const pk_pattern *p = pk_operator_pattern(c.op);
      double complex *values = malloc((size_t)p->start[p->n] * sizeof *values);
      double complex *ones = malloc((size_t)p->n * sizeof *ones);
      double complex *sum = malloc((size_t)p->n * sizeof *sum);
      pk_operator_values(c.op, (pk_phase){1, 1, 0}, 0, values);
      for (int64_t i = 0; i < p->n; i++) {
        ones[i] = 1;
      }
      pk_sparse_times_complex(p, values, ones, sum);
      assert_true(largest(p->n, sum) < 1e-12 * largest(p->start[p->n], values));
      free(values);
      free(ones);
      free(sum);
    }
    cell_close(&c);
  }
}

/* A has no negative eigenvalue, whatever lies in the boxes. */
static void energies_are_not_negative(void **state) {
  (void)state;
  for (int k = 0; k < 2 * SAMPLE_COUNT; k++) {
    test_cell c = sample(k / 2, (pk_polarization)(k % 2));
    int n = (int)pk_operator_size(c.op);
    double complex *a = dense_of(c.op, sample_phase(&c), 0);
    double *values = malloc((size_t)n * sizeof *values);
    assert_int_equal(pk_dense_hermitian(c.context, n, a, values), PICKET_OK);
    assert_true(values[0] > -1e-12 * values[n - 1]);
    free(a);
    free(values);
    cell_close(&c);
  }
}

/* Where node number k of a cross difference stands, unfolded, along an axis. */
static double unfolded(const test_cell *c, const pk_cross *cross, int axis, int k,
                       pk_axis_name along) {
  int64_t node = cross->node[axis][k];
  int nv = pk_operator_lines(c->op, PK_V);
  double at, length;
  pk_operator_line(c->op, along, (int)(along == PK_U ? node / nv : node % nv), &at, &length);
  double wraps_v = cross->wv[axis][k];
  return along == PK_U ? at + (cross->wu[axis][k] + wraps_v * c->cell.shift) * c->cell.pitch_um
                       : at + wraps_v * c->cell.span_um;
}

/* The two differences of a mixed term: exact for fields that rise evenly, zero across them. */
static void mixed_terms_differentiate_linear_fields(void **state) {
  (void)state;
  static const int OBLIQUE[] = {1, 2, 5, 7};
  for (int i = 0; i < 4; i++) {
    test_cell c = sample(OBLIQUE[i], PK_HY);
    assert_true(c.op->cross_count > 10);
    for (int64_t k = 0; k < c.op->cross_count; k++) {
      const pk_cross *cross = &c.op->cross[k];
      for (int axis = 0; axis < 2; axis++) {
        double constant = 0, rise[2] = {0, 0};
        for (int a = 0; a < cross->count[axis]; a++) {
          double coefficient = creal(cross->coefficient[axis][a]);
          constant += coefficient;
          rise[0] += coefficient * unfolded(&c, cross, axis, a, PK_U);
          rise[1] += coefficient * unfolded(&c, cross, axis, a, PK_V);
        }
        assert_int_equal(cross->count[axis], 3); /* no wall with a zero in these samples */
        assert_near(constant, 0, 1e-12);
        assert_near(rise[axis], 1, 1e-12);
        assert_near(rise[1 - axis], 0, 1e-12);
      }
    }
    cell_close(&c);
  }
}

static void media_that_are_covered_are_not_used(void **state) {
  (void)state;
  for (int polarization = 0; polarization < 2; polarization++) {
    test_cell c = cell_of(PK_LATERAL_PERIODIC, 0.6, 0.8, 0, 3, SAMPLE_INDEX);
    cell_rect(&c, 2, 0, 0, 0.2, 0.2);
    cell_rect(&c, 1, 0, 0, 0.3, 0.3);
    cell_lay_even(&c, 9, 9);
    cell_open(&c, (pk_polarization)polarization, 1, 4);
    assert_true(pk_operator_uses(c.op, 0) && pk_operator_uses(c.op, 1));
    assert_false(pk_operator_uses(c.op, 2));
    cell_close(&c);
  }
}

static void lines_of_the_operator_are_those_of_the_grid(void **state) {
  (void)state;
  test_cell c = sample(4, PK_EY);
  double at, length, sum = 0;
  for (int i = 0; i < pk_operator_lines(c.op, PK_V); i++) {
    pk_operator_line(c.op, PK_V, i, &at, &length);
    assert_near(at, c.grid.v.line[i + 1], 0);
    sum += length;
  }
  sum += 0.5 * creal(c.grid.v.length[0] + c.grid.v.length[c.grid.v.intervals - 1]);
  assert_near(sum, 0.8, 1e-14);
  cell_close(&c);
  c = sample(6, PK_EY);
  assert_int_equal(pk_operator_lines(c.op, PK_V), 1);
  pk_operator_line(c.op, PK_V, 0, &at, &length);
  assert_near(length, 1, 0);
  cell_close(&c);
}

static picket_status create(test_cell *c, pk_polarization polarization) {
  pk_operator_plan plan = {polarization,      c->cell.geometry,    &c->base.u, &c->base.v,
                           c->base.uniform_v, c->base.shift_lines, 3};
  pk_operator *op = NULL;
  picket_status status = pk_operator_create(c->context, &plan, &op);
  assert_true((status == PICKET_OK) == (op != NULL));
  pk_operator_free(op);
  return status;
}

static void every_allocation_may_fail(void **state) {
  (void)state;
  for (int polarization = 0; polarization < 2; polarization++) {
    for (long n = 1;; n++) {
      short_memory memory = {.fail_at = 0};
      picket_context *context = short_memory_context(&memory);
      test_cell c = cell_in(context, PK_LATERAL_PERIODIC, 0.6, 0.8, 0, 3, SAMPLE_INDEX);
      paint_oblique(&c);
      cell_lay_even(&c, 12, 12); /* more than 64 mixtures, so that their list grows */
      memory.fail_at = memory.asked + n;
      picket_status status = create(&c, (pk_polarization)polarization);
      bool failed = memory.asked >= memory.fail_at;
      assert_int_equal(status, failed ? PICKET_ERROR_MEMORY : PICKET_OK);
      cell_close(&c);
      assert_int_equal(memory.living, 0);
      if (!failed) {
        assert_true(n > 15); /* it did ask for memory */
        break;
      }
    }
  }
  pk_operator_free(NULL);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(the_pattern_is_sorted_and_symmetric),
      cmocka_unit_test(masses_add_up_to_the_integral),
      cmocka_unit_test(constant_fields_cost_nothing),
      cmocka_unit_test(energies_are_not_negative),
      cmocka_unit_test(mixed_terms_differentiate_linear_fields),
      cmocka_unit_test(media_that_are_covered_are_not_used),
      cmocka_unit_test(lines_of_the_operator_are_those_of_the_grid),
      cmocka_unit_test(every_allocation_may_fail),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
