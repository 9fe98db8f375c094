/* All waves of a cell at one frequency: against closed forms of the grid, against the dense problem
 * of the whole cell, against single waves and against ω(k).
 *
 * Tolerances: a wave is as exact as k0² times the rounding of T, which has entries of 4/h²: 1e-12
 * on these grids, times the sensitivity of ξ. */
#include "bloch/columns.h"

#include "bloch/wavenumber.h"
#include "dense/dense.h"
#include "unit/cells.h"
#include "unit/short_memory.h"

static const double K0 = 4.1; /* λ = 1532 nm */

/* Reduces and lists; checks what must hold for every list. */
static pk_columns *all_waves(test_cell *c, pk_phase phase, double k0, double reach,
                             pk_column_modes *modes) {
  pk_columns *columns = NULL;
  assert_int_equal(pk_columns_reduce(c->context, c->op, phase, k0, &columns), PICKET_OK);
  assert_int_equal(pk_columns_modes(columns, reach, modes), PICKET_OK);
  pk_columns_facts facts = pk_columns_cost(columns);
  double change = 0;
  for (int i = 0; i < modes->count; i++) {
    const pk_column_mode *m = &modes->mode[i];
    double ln = fabs(log(cabs(m->xi)));
    assert_true(ln <= reach);
    assert_true(ln > change - 1e-4); /* sorted, propagating ones in any order */
    change = fmax(change, ln);
    assert_true(m->residual < 1e-10);
    if (!facts.mirrored && !facts.symmetric) {
      assert_int_equal(m->partner, -1);
      continue;
    }
    const pk_column_mode *partner = &modes->mode[m->partner];
    assert_int_equal(partner->partner, i);
    assert_int_equal(m->partner, i % 2 == 0 ? i + 1 : i - 1);
    if (i % 2 == 0) {
      assert_near(cabs(m->xi * partner->xi - 1), 0, 1e-15); /* rounding of one division */
      assert_true(cabs(m->xi) < 1 + 1e-9);
    }
  }
  return columns;
}

static void forget(pk_columns *columns, pk_column_modes *modes) {
  pk_column_modes_clear(modes);
  pk_columns_free(columns);
}

static void clear_waves(const test_cell *c, int count, pk_wave *waves) {
  for (int i = 0; i < count; i++) {
    pk_wave_clear(c->context, &waves[i]);
  }
}

/* The distance of the nearest wave of a list, relative to ξ. */
static double distance(const pk_column_modes *modes, double complex xi) {
  double nearest = INFINITY;
  for (int i = 0; i < modes->count; i++) {
    nearest = fmin(nearest, cabs(modes->mode[i].xi / xi - 1));
  }
  return nearest;
}

/* The grid of an empty cell: sin(jπx/span) between walls, exp(±i(2πj + κ)x/span) in a lattice, and
 *   (2 - 2 cos(k_z h_z))/h_z² = k0² ε - q²,  q² = 4 sin²(k_x h_x/2)/h_x². */
static void empty_cells_have_the_dispersion_of_their_grid(void **state) {
  (void)state;
  enum { NU = 17, NV = 20 };
  const double index = 1.444, pitch = 0.3, span = 1.7, reach = 5;
  for (int kind = 0; kind < 3; kind++) {
    bool walls = kind == 0;
    test_cell c =
        cell_of(walls ? PK_LATERAL_ELECTRIC : PK_LATERAL_PERIODIC, pitch, span, 0, 1, &index);
    cell_lay_even(&c, NU + kind % 2, NV); /* mirrors on columns, and one between two */
    cell_open(&c, PK_EY, 1, K0);
    double chi = kind == 2 ? 0.7 : 0;
    pk_phase phase = {1, cexp(I * chi), 0};
    pk_column_modes modes = {0};
    pk_columns *columns = all_waves(&c, phase, K0, reach, &modes);
    pk_columns_facts facts = pk_columns_cost(columns);
    assert_true(facts.mirrored);
    assert_true(facts.symmetric == (kind != 2));
    assert_int_equal(facts.lines, walls ? NV - 1 : NV);
    double hx = span / NV, hz = pitch / (NU + kind % 2);
    int expected = 0;
    for (int j = 0; j < facts.lines; j++) {
      double kx = walls ? (j + 1) * PI / span : (2 * PI * j + chi) / span;
      double q2 = pow(2 * sin(0.5 * kx * hx) / hx, 2);
      double complex kz = cacos(1 - 0.5 * hz * hz * (K0 * K0 * index * index - q2)) / hz;
      double complex xi = cexp(I * kz * pitch);
      if (fabs(log(cabs(xi))) < reach) {
        expected += 2;
        assert_near(distance(&modes, xi), 0, 1e-11);
        assert_near(distance(&modes, 1 / xi), 0, 1e-11);
      }
    }
    assert_int_equal(modes.count, expected);
    forget(columns, &modes);
    cell_close(&c);
  }
}

/* P. Yeh, A. Yariv, C.-S. Hong, J. Opt. Soc. Am. 67, 423 (1977): E along the layers,
 *   cos KΛ = cos(k₁a) cos(k₂b) - ½(k₂/k₁ + k₁/k₂) sin(k₁a) sin(k₂b);
 * H along the layers: the ratios are of k/ε. Values on three grids, the errors h² and h⁴ removed.
 */
static void stacks_follow_yeh_yariv_and_hong(void **state) {
  (void)state;
  const double index[2] = {1.444, 3.4757}, a = 0.13, b = 0.17, kx = 1.1;
  for (int polarization = 0; polarization < 2; polarization++) {
    for (double k0 = 3.3; k0 < 8; k0 += 1.1) { /* through the first stop band, from 4.1 to 6.3 */
      double value[3];
      for (int m = 1; m <= 3; m++) {
        test_cell c = cell_of(PK_LATERAL_UNIFORM, a + b, 0, 0, 2, index);
        cell_layer(&c, 1, -0.5 * (a + b), 0.5 * (a + b) - a);
        cell_lay_even(&c, 60, 1);
        cell_open(&c, (pk_polarization)polarization, m, k0);
        pk_column_modes modes = {0};
        pk_columns *columns = all_waves(&c, (pk_phase){1, 1, kx}, k0, 3, &modes);
        assert_int_equal(modes.count, 2);
        value[m - 1] = creal(modes.mode[0].xi + modes.mode[1].xi) / 2;
        forget(columns, &modes);
        cell_close(&c);
      }
      /* The combination without h² and h⁴ of h, h/2, h/3. */
      double cosine = value[0] / 24 - 16 * value[1] / 15 + 81 * value[2] / 40;
      double k1 = sqrt(pow(index[0] * k0, 2) - kx * kx), k2 = sqrt(pow(index[1] * k0, 2) - kx * kx);
      double ratio = k2 / k1 * (polarization == PK_HY ? pow(index[0] / index[1], 2) : 1);
      double exact =
          cos(k1 * a) * cos(k2 * b) - 0.5 * (ratio + 1 / ratio) * sin(k1 * a) * sin(k2 * b);
      /* The next error, h⁶, is 1e-9 with (k2 h)² = 0.02 on the coarsest grid. */
      assert_near(cosine, exact, 2e-8);
    }
  }
}

enum { KINDS = 10, CELL_NU = 12, CELL_NV = 7 };

/* Small cells of every kind of boundary, filling and symmetry. The loaded media are lossy in the
 * odd ones. */
static test_cell small_cell(int kind, pk_polarization polarization) {
  static const double INDEX[] = {1.3, 3.4, 2.1};
  static const double TRIANGLE[3][2] = {{-0.2, -0.15}, {0.15, -0.1}, {0.05, 0.25}};
  bool walls = kind % 3 == 0;
  test_cell c = cell_of(walls ? PK_LATERAL_ELECTRIC : PK_LATERAL_PERIODIC, 0.6, 0.8, 0, 3, INDEX);
  double middle = kind == 2 || kind == 9 ? 0.025 : 0; /* between two columns */
  if (kind < 3) { /* its own mirror image; at kind 1 one mirror of two is between columns */
    cell_rect(&c, 1, middle, 0.05, kind == 0 ? 0.3 : 0.25, 0.31);
  } else if (kind < 6) { /* two stretches, and columns that are not uniform */
    cell_rect(&c, 1, 0.1, 0.05, 0.2, 0.31);
    cell_rect(&c, 2, 0.17, -0.2, 0.2, 0.2);
  } else if (kind < 8) {
    cell_polygon(&c, 1, 3, TRIANGLE);
    cell_disc(&c, 2, 0.1, 0.12, 0.3);
  } else {
    cell_disc(&c, 1, middle, 0, 0.5);
  }
  cell_lay_even(&c, kind == 1 ? CELL_NU + 1 : CELL_NU, CELL_NV);
  if (walls) {
    c.base.v.layer[1] = (pk_layer){0.3, 5};
  }
  cell_open(&c, polarization, 1, K0);
  if (kind % 2 != 0) {
    pk_operator_load(c.op, (double complex[]){1.7, 11.6 + 0.3 * I, 4.4 + 0.1 * I});
  }
  return c;
}

/* At lateral phases of 0, π and between. */
static pk_phase small_phase(int kind) {
  static const double KX[KINDS] = {0, 0.3, 0, 0, 1, 0.7, 0, 0.2, 1, 0};
  return pk_phase_at(&(pk_cell){.lateral = PK_LATERAL_PERIODIC}, 0, KX[kind]);
}

/* Finite eigenvalues of (ξ²C₊ + ξK + C₋)v = 0 on all unknowns, as a pencil of twice the order. */
static int dense_waves(const test_cell *c, pk_phase phase, double k0, double complex *xi) {
  size_t n = (size_t)pk_operator_size(c->op), m = 2 * n;
  double complex *at[3];
  const double complex points[3] = {1, -1, I};
  for (int i = 0; i < 3; i++) {
    phase.xi = points[i];
    at[i] = dense_of(c->op, phase, k0 * k0);
  }
  double complex *A = calloc(m * m, sizeof *A), *B = calloc(m * m, sizeof *B);
  double complex *alpha = calloc(2 * m, sizeof *alpha), *beta = alpha + m;
  for (size_t j = 0; j < n; j++) {
    A[j + (n + j) * m] = B[j + j * m] = 1;
    for (size_t i = 0; i < n; i++) {
      double complex K = (at[0][i + j * n] + at[1][i + j * n]) / 2;
      double complex sum = at[0][i + j * n] - K, difference = (at[2][i + j * n] - K) / I;
      A[n + i + j * m] = -(sum - difference) / 2;
      A[n + i + (n + j) * m] = -K;
      B[n + i + (n + j) * m] = (sum + difference) / 2;
    }
  }
  assert_int_equal(pk_dense_pencil(c->context, (int)m, A, B, alpha, beta, NULL), PICKET_OK);
  int count = 0;
  for (size_t i = 0; i < m; i++) {
    if (cabs(beta[i]) > 1e-6 * cabs(alpha[i]) && cabs(alpha[i]) > 1e-6 * cabs(beta[i])) {
      xi[count++] = alpha[i] / beta[i];
    }
  }
  for (int i = 0; i < 3; i++) {
    free(at[i]);
  }
  free(A);
  free(B);
  free(alpha);
  return count;
}

/* Nothing is missed and nothing is invented: |ln|ξ|| up to 6. */
static void small_cells_have_the_waves_of_the_whole_dense_problem(void **state) {
  (void)state;
  bool met[2][2] = {{false, false}, {false, false}};
  for (int run = 0; run < 2 * KINDS; run++) {
    int kind = run / 2;
    test_cell c = small_cell(kind, (pk_polarization)(run % 2));
    pk_phase phase = small_phase(kind);
    double complex xi[2 * CELL_NU * CELL_NV + 2 * CELL_NV];
    int count = dense_waves(&c, phase, K0, xi), inside = 0;
    pk_column_modes modes = {0};
    pk_columns *columns = all_waves(&c, phase, K0, 6, &modes);
    pk_columns_facts facts = pk_columns_cost(columns);
    met[facts.mirrored][facts.symmetric] = true;
    for (int i = 0; i < count; i++) {
      if (fabs(log(cabs(xi[i]))) < 6) {
        inside++;
        /* The pencil itself is good to 1e-13 exp(6). */
        assert_near(distance(&modes, xi[i]), 0, 1e-9);
      }
    }
    assert_int_equal(modes.count, inside);
    assert_true(inside >= 4);
    forget(columns, &modes);
    cell_close(&c);
  }
  assert_true(met[0][0] && met[0][1] && met[1][0] && met[1][1]);
}

/* Fields on the cell hold with their true residual, and a single wave started beside each of them
 * ends there. */
static void fields_hold_and_single_waves_agree(void **state) {
  (void)state;
  for (int run = 0; run < 2 * KINDS; run++) {
    int kind = run / 2;
    test_cell c = small_cell(kind, (pk_polarization)(run % 2));
    pk_phase phase = small_phase(kind);
    pk_column_modes modes = {0};
    pk_columns *columns = all_waves(&c, phase, K0, 3, &modes);
    pk_wave *waves = calloc((size_t)modes.count, sizeof *waves);
    assert_int_equal(pk_columns_waves(columns, c.solver, &modes, 0, modes.count, waves), PICKET_OK);
    for (int i = 0; i < modes.count; i++) {
      assert_true(waves[i].xi == modes.mode[i].xi); /* none had to be polished */
      assert_true(waves[i].residual < 1e-10);
      phase.xi = waves[i].xi; /* lᵀ T'(ξ) r is not 0: the two vectors belong together */
      assert_true(cabs(pk_operator_phase_form(c.op, phase, 1, 0, waves[i].left, waves[i].right)) >
                  1e-6);
      pk_wave single;
      double complex guess = modes.mode[i].xi * (1 + 1e-6);
      assert_int_equal(pk_wave_near(c.solver, phase, K0, guess, waves[i].right, &single),
                       PICKET_OK);
      assert_near(cabs(single.xi / modes.mode[i].xi - 1), 0, 1e-9);
      pk_wave_clear(c.context, &single);
    }
    clear_waves(&c, modes.count, waves);
    free(waves);
    forget(columns, &modes);
    cell_close(&c);
  }
}

/* The left field of a wave is the right one of its partner up to a factor, where T(ξ)ᵀ = T(1/ξ):
 * found by two different solves. */
static void left_fields_are_those_of_the_partner(void **state) {
  (void)state;
  for (int kind = 0; kind < KINDS; kind += 3) {
    test_cell c = small_cell(kind, PK_HY);
    pk_column_modes modes = {0};
    pk_columns *columns = all_waves(&c, small_phase(kind), K0, 3, &modes);
    assert_true(pk_columns_cost(columns).symmetric);
    pk_wave pair[2];
    assert_int_equal(pk_columns_waves(columns, c.solver, &modes, 2, 2, pair), PICKET_OK);
    long n = (long)pk_operator_size(c.op);
    assert_near(cabs(pk_dense_dot(n, pair[0].left, pair[1].right)), 1, 1e-10);
    assert_near(cabs(pk_dense_dot(n, pair[1].left, pair[0].right)), 1, 1e-10);
    clear_waves(&c, 2, pair);
    forget(columns, &modes);
    cell_close(&c);
  }
}

/* Frequencies of a real k, then all waves at each of them: the k must be among them. */
static void the_waves_at_a_frequency_hold_the_k_it_belongs_to(void **state) {
  (void)state;
  uint64_t seed = 77;
  for (int i = 0; i < 8; i++) {
    pk_lateral lateral = i % 2 ? PK_LATERAL_PERIODIC : PK_LATERAL_ELECTRIC;
    test_cell c = random_cell(lateral, &seed);
    if (i >= 4) {
      cell_disc(&c, 2, 0.1 * c.cell.pitch_um, 0, 0.6 * c.cell.pitch_um);
    }
    cell_lay_even(&c, 24, 21);
    double kz = random_in(&seed, 0.3, 0.8), kx = i % 4 == 1 ? 0.37 : 0;
    for (int polarization = 0; polarization < 2; polarization++) {
      cell_open(&c, (pk_polarization)polarization, 1, K0);
      double lambda[4];
      lowest(&c, kz, kx, 4, lambda);
      pk_phase phase = pk_phase_at(&c.cell, kz, kx);
      for (int band = 0; band < 4; band++) {
        pk_column_modes modes = {0};
        pk_columns *columns = all_waves(&c, phase, sqrt(lambda[band]), 3, &modes);
        assert_near(distance(&modes, phase.xi), 0, 1e-10);
        forget(columns, &modes);
      }
      cell_shut(&c);
    }
    cell_close(&c);
  }
}

/* Where nothing varies with x, exp(±2πix/span) have the same ξ. Left and right vectors of two
 * copies are combined to be independent in the sense of perturbation theory. */
static void copies_are_separated(void **state) {
  (void)state;
  const double index[] = {1.444, 2, 3.4757};
  for (int layers = 0; layers < 3; layers += 2) { /* two layers are no mirror image of themselves */
    test_cell c = cell_of(PK_LATERAL_PERIODIC, 0.3, 1.7, 0, 3, index);
    for (int k = 0; k < layers; k++) {
      cell_layer(&c, 1 + k, -0.15 + 0.075 * k, -0.075 + 0.075 * k);
    }
    cell_lay_even(&c, 16, 20);
    cell_open(&c, PK_EY, 1, K0);
    pk_phase phase = {1, 1, 0};
    pk_column_modes modes = {0};
    pk_columns *columns = all_waves(&c, phase, K0, 2, &modes);
    assert_true(pk_columns_cost(columns).mirrored == (layers == 0));
    int copies = 0;
    for (int i = 0; i + 2 < modes.count; i += 2) {
      if (cabs(modes.mode[i].xi / modes.mode[i + 2].xi - 1) > 1e-9) {
        continue;
      }
      copies++;
      pk_wave three[3];
      assert_int_equal(pk_columns_waves(columns, c.solver, &modes, i, 3, three), PICKET_OK);
      phase.xi = modes.mode[i].xi;
      double own = cabs(pk_operator_phase_form(c.op, phase, 1, 0, three[0].left, three[0].right));
      double cross = cabs(pk_operator_phase_form(c.op, phase, 1, 0, three[0].left, three[2].right));
      assert_true(own > 1e-3);
      assert_near(cross / own, 0, 1e-8);
      clear_waves(&c, 3, three);
    }
    assert_true(copies >= 2);
    forget(columns, &modes);
    cell_close(&c);
  }
}

/* At a band edge two waves meet at ξ = -1 and differ by the square root of rounding only; the list
 * must hold the two, as a pair. */
static void band_edges_do_no_harm(void **state) {
  (void)state;
  for (int kind = 0; kind < 6; kind += 2) {
    test_cell c = small_cell(kind, PK_EY);
    if (c.cell.lateral == PK_LATERAL_ELECTRIC) {
      cell_shut(&c); /* without the absorbing layer */
      c.base.v.layer[1] = (pk_layer){0, 0};
      cell_open(&c, PK_EY, 1, K0);
    }
    double kx = creal(small_phase(kind).chi) < 0 ? 1 : 0, lambda[3];
    lowest(&c, 1, kx, 3, lambda);
    for (int band = 0; band < 3; band++) {
      pk_column_modes modes = {0};
      pk_columns *columns =
          all_waves(&c, pk_phase_at(&c.cell, 1, kx), sqrt(lambda[band]), 3, &modes);
      assert_near(distance(&modes, -1), 0, 1e-5);
      forget(columns, &modes);
    }
    cell_close(&c);
  }
}

/* A wave that is off is put right from the operator of the whole cell. */
static void a_rough_wave_is_polished(void **state) {
  (void)state;
  test_cell c = small_cell(3, PK_HY);
  pk_column_modes modes = {0};
  pk_columns *columns = all_waves(&c, small_phase(3), K0, 3, &modes);
  const double complex exact = modes.mode[0].xi;
  modes.mode[0].xi *= 1 + 1e-5;
  pk_wave wave;
  assert_int_equal(pk_columns_waves(columns, c.solver, &modes, 0, 1, &wave), PICKET_OK);
  assert_near(cabs(wave.xi / exact - 1), 0, 1e-10);
  assert_true(wave.residual < PK_RESIDUAL_LIMIT);
  pk_wave_clear(c.context, &wave);
  forget(columns, &modes);
  cell_close(&c);
}

static void stretches_are_doubled_and_mirrors_used(void **state) {
  (void)state;
  static const double INDEX[] = {1.444, 3.4757};
  for (int lateral = 0; lateral < 2; lateral++) {
    test_cell c =
        cell_of(lateral ? PK_LATERAL_PERIODIC : PK_LATERAL_MAGNETIC, 0.32, 1, 0, 2, INDEX);
    cell_rect(&c, 1, 0, 0, 0.16, 0.5);
    cell_lay_even(&c, 32, 20);
    cell_open(&c, PK_HY, 1, K0);
    pk_column_modes modes = {0};
    pk_columns *columns = all_waves(&c, (pk_phase){1, 1, 0}, K0, 3, &modes);
    pk_columns_facts facts = pk_columns_cost(columns);
    assert_true(facts.mirrored && facts.symmetric);
    assert_int_equal(facts.stretches, 2); /* half a segment, half a gap */
    assert_int_equal(facts.singles, 0);
    assert_true(modes.count >= 2);
    pk_wave pair[2]; /* residuals on the whole cell */
    assert_int_equal(pk_columns_waves(columns, c.solver, &modes, 0, 2, pair), PICKET_OK);
    for (int i = 0; i < 2; i++) {
      assert_true(pair[i].xi == modes.mode[i].xi && pair[i].residual < 1e-9);
    }
    clear_waves(&c, 2, pair);
    forget(columns, &modes);
    cell_close(&c);
  }
}

static void a_lateral_shift_is_refused(void **state) {
  (void)state;
  static const double INDEX[] = {1.3, 3.4};
  test_cell c = cell_of(PK_LATERAL_PERIODIC, 0.6, 0.8, 0.5, 2, INDEX);
  cell_rect(&c, 1, 0, 0, 0.3, 0.3);
  cell_lay_even(&c, 12, 8);
  cell_open(&c, PK_EY, 1, K0);
  pk_columns *columns = NULL;
  assert_int_equal(pk_columns_reduce(c.context, c.op, (pk_phase){1, 1, 0}, K0, &columns),
                   PICKET_ERROR_UNSUPPORTED);
  assert_non_null(strstr(picket_context_message(c.context), "shift"));
  cell_close(&c);
}

static picket_status run_all(test_cell *c, pk_phase phase) {
  pk_columns *columns = NULL;
  pk_column_modes modes = {0};
  pk_wave waves[2] = {{0}};
  picket_status status = pk_columns_reduce(c->context, c->op, phase, K0, &columns);
  if (status == PICKET_OK) {
    status = pk_columns_modes(columns, 3, &modes);
  }
  if (status == PICKET_OK) {
    status = pk_columns_waves(columns, c->solver, &modes, 0, 2, waves);
  }
  clear_waves(c, 2, waves);
  forget(columns, &modes);
  return status;
}

static void every_allocation_fails_once(void **state) {
  (void)state;
  for (int kind = 1; kind < 6; kind += 2) {
    test_cell sample = small_cell(kind, PK_HY);
    short_memory memory = {0};
    picket_context *context = short_memory_context(&memory), *own = sample.context;
    assert_non_null(context);
    /* The solver and its factor belong to the sample, so that only ours is counted. */
    sample.context = context;
    assert_int_equal(run_all(&sample, small_phase(kind)), PICKET_OK);
    const long calls = memory.asked;
    for (long i = 2; i <= calls; i++) {
      memory.asked = 1; /* the context itself was the first */
      memory.fail_at = i;
      assert_int_equal(run_all(&sample, small_phase(kind)), PICKET_ERROR_MEMORY);
      assert_int_equal(memory.living, 1);
    }
    picket_context_free(context);
    assert_int_equal(memory.living, 0);
    sample.context = own;
    cell_close(&sample);
  }
}

int main(void) {
  pk_dense_warm_up();
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(empty_cells_have_the_dispersion_of_their_grid),
      cmocka_unit_test(stacks_follow_yeh_yariv_and_hong),
      cmocka_unit_test(small_cells_have_the_waves_of_the_whole_dense_problem),
      cmocka_unit_test(fields_hold_and_single_waves_agree),
      cmocka_unit_test(left_fields_are_those_of_the_partner),
      cmocka_unit_test(the_waves_at_a_frequency_hold_the_k_it_belongs_to),
      cmocka_unit_test(copies_are_separated),
      cmocka_unit_test(band_edges_do_no_harm),
      cmocka_unit_test(a_rough_wave_is_polished),
      cmocka_unit_test(stretches_are_doubled_and_mirrors_used),
      cmocka_unit_test(a_lateral_shift_is_refused),
      cmocka_unit_test(every_allocation_fails_once),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
