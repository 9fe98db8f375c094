/* Stop bands of the fundamental family: stacks in closed form, segmented guides against values
 * found by other methods, and the family that must be told from others. */
#include "bloch/stop_band.h"

#include "bloch/wavenumber.h"
#include "study/extrapolate.h"
#include "unit/cells.h"
#include "unit/short_memory.h"

enum { GRIDS = 3 };

/* h², h⁴, h⁶ on snapped grids of smooth problems. */
static const pk_error_law SMOOTH = {.count = 3, .exponent = {2, 4, 6}, .smooth = 1};

static double limit(const int *m, const double *values) {
  return pk_extrapolate(&SMOOTH, GRIDS, m, values).value;
}

typedef struct edges {
  double low[GRIDS], high[GRIDS], attenuation[GRIDS]; /* k0 of the edges; Im k */
} edges;

/* The stop band of an order on three grids of the base of a cell. */
static edges find(test_cell *c, pk_polarization polarization, const int *m, int order,
                  double k0_start) {
  edges e;
  for (int g = 0; g < GRIDS; g++) {
    cell_open(c, polarization, m[g], k0_start);
    pk_stop_band_request request = {.pitch_um = c->cell.pitch_um,
                                    .last_order = order,
                                    .k0_start = k0_start,
                                    .open = c->cell.lateral == PK_LATERAL_OPEN};
    pk_stop_band bands[3];
    assert_int_equal(pk_stop_bands(c->solver, &c->media, &request, bands), PICKET_OK);
    const pk_stop_band *band = &bands[order - 1];
    assert_int_equal(band->order, order);
    assert_int_equal(band->edge[0].state, PK_EDGE_FOUND);
    assert_int_equal(band->edge[1].state, PK_EDGE_FOUND);
    e.low[g] = band->edge[0].k0;
    e.high[g] = band->edge[1].k0;
    e.attenuation[g] = band->has_attenuation ? band->attenuation : 0;
    cell_shut(c);
  }
  return e;
}

static test_cell two_layers(double pitch, double n1, double n2, double part) {
  const double index[] = {n2, n1};
  test_cell c = cell_of(PK_LATERAL_UNIFORM, pitch, 0, 0, 2, index);
  cell_layer(&c, 1, -0.5 * part * pitch, 0.5 * part * pitch);
  pk_cell_grid_wish wish = {.steps_per_pitch = 24};
  cell_lay(&c, &wish);
  return c;
}

static const int STACK_GRIDS[GRIDS] = {4, 6, 8};

/* Quarter-wave stack (P. Yeh, A. Yariv and C.-S. Hong, J. Opt. Soc. Am. 67, 423 (1977)): the gap is
 * (4/π) asin((n1 - n2)/(n1 + n2)) of the middle, where the wave falls by n1/n2 in a period; ey and
 * hy are the same at normal incidence. Found to 2e-11 from 96 to 192 steps in a pitch. */
static void quarter_wave_stacks_have_the_closed_gap(void **state) {
  (void)state;
  static const double INDICES[][2] = {{2.4, 1.45}, {3.605551275463989, 1}, {1.5, 1.45}};
  for (int k = 0; k < 6; k++) {
    double n1 = INDICES[k / 2][0], n2 = INDICES[k / 2][1];
    double pitch = 0.25 * (1 / n1 + 1 / n2); /* λ = 1 in the middle */
    test_cell c = two_layers(pitch, n1, n2, 0.25 / n1 / pitch);
    edges e = find(&c, (pk_polarization)(k % 2), STACK_GRIDS, 1, 6);
    double low = limit(STACK_GRIDS, e.low) / (2 * PI), high = limit(STACK_GRIDS, e.high) / (2 * PI);
    assert_near(0.5 * (low + high), 1, 1e-9);
    assert_near(high - low, 4 / PI * asin((n1 - n2) / (n1 + n2)), 1e-9);
    assert_near(limit(STACK_GRIDS, e.attenuation) * pitch, log(n1 / n2), 1e-9);
    cell_close(&c);
  }
}

/* Edges in pitch/λ from the trace of the exact cell matrix, eight digits. The first two are the
 * stacks of a textbook figure with gaps of 51.9 % and 76.3 % (from memory of the source:
 * Joannopoulos et al., Photonic Crystals, 2nd ed.). */
static void other_stacks_have_their_edges(void **state) {
  (void)state;
  static const double CASES[][5] = {
      {3.605551275463989, 1, 0.5, 0.15085546, 0.25656780},
      {3.605551275463989, 1, 0.2, 0.20305328, 0.45363786},
      {3.605551275463989, 3.4641016151377544, 0.5, 0.13964869, 0.14325058},
      {3.476, 1.444, 0.5, 0.15512759, 0.24209664}};
  for (int k = 0; k < 8; k++) {
    const double *values = CASES[k / 2];
    test_cell c = two_layers(0.3, values[0], values[1], values[2]);
    edges e = find(&c, (pk_polarization)(k % 2), STACK_GRIDS, 1, 4);
    assert_near(limit(STACK_GRIDS, e.low) * 0.3 / (2 * PI), values[3], 6e-9);
    assert_near(limit(STACK_GRIDS, e.high) * 0.3 / (2 * PI), values[4], 6e-9);
    cell_close(&c);
  }
}

/* A half-wave pair has no second gap: both edges lie at twice the middle of the first one. */
static void the_second_gap_of_a_quarter_wave_stack_is_closed(void **state) {
  (void)state;
  double pitch = 0.25 * (1 / 2.4 + 1 / 1.45);
  test_cell c = two_layers(pitch, 2.4, 1.45, 0.25 / 2.4 / pitch);
  edges e = find(&c, PK_EY, STACK_GRIDS, 2, 6);
  assert_near(limit(STACK_GRIDS, e.low) / (2 * PI), 2, 1e-9);
  assert_near(limit(STACK_GRIDS, e.high) / (2 * PI), 2, 1e-9);
  cell_close(&c);
}

/* exp(ikΛ) of the wave at a wavelength on three grids, extrapolated: Im k and Re k in 1/µm. */
static double complex wavenumber(test_cell *c, pk_polarization polarization, const int *m,
                                 const pk_error_law *law, double wavelength, double kx,
                                 double complex k_guess) {
  double re[GRIDS], im[GRIDS], pitch = c->cell.pitch_um, k0 = 2 * PI / wavelength;
  for (int g = 0; g < GRIDS; g++) {
    cell_open(c, polarization, m[g], k0);
    pk_wave wave;
    pk_phase phase = {1, 1, kx};
    assert_int_equal(pk_wave_near(c->solver, phase, k0, cexp(I * k_guess * pitch), NULL, &wave),
                     PICKET_OK);
    double complex k = -I * clog(wave.xi) / pitch;
    re[g] =
        creal(k) < -1e-6 ? creal(k) + 2 * PI / pitch : creal(k); /* into the zone of the guess */
    im[g] = cimag(k);
    pk_wave_clear(c->context, &wave);
    cell_shut(c);
  }
  return pk_extrapolate(law, GRIDS, m, re).value + I * pk_extrapolate(law, GRIDS, m, im).value;
}

/* Stacks from the trace of the exact cell matrix, 40 digits (open cases "stack-quarter-wave" and
 * "stack-three-layer-oblique"), and index and decay of the 3.476/1.444 halves at λ = 1.55. */
static void waves_in_stacks(void **state) {
  (void)state;
  double pitch = 0.16145833333333334 + 0.26724137931034486;
  test_cell c = two_layers(pitch, 2.4, 1.45, 0.16145833333333334 / pitch);
  double complex k = wavenumber(&c, PK_EY, STACK_GRIDS, &SMOOTH, 1.55, 0, PI / pitch + 1.2 * I);
  assert_near(cimag(k), 1.175426915530142, 1e-8);
  k = wavenumber(&c, PK_HY, STACK_GRIDS, &SMOOTH, 2.5, 0, 4.75);
  assert_near(creal(k), 4.770753928115744, 1e-8);
  cell_close(&c);
  const double index[] = {1.45, 3.4, 2.0};
  c = cell_of(PK_LATERAL_UNIFORM, 0.42, 0, 0, 3, index);
  cell_layer(&c, 1, -0.21, -0.09);
  cell_layer(&c, 2, 0.11, 0.21);
  pk_cell_grid_wish wish = {.steps_per_pitch = 24};
  cell_lay(&c, &wish);
  k = wavenumber(&c, PK_EY, STACK_GRIDS, &SMOOTH, 1.5, 2.5, PI / 0.42 + 1.6 * I);
  assert_near(cimag(k), 1.6038465854939983, 1e-8);
  k = wavenumber(&c, PK_HY, STACK_GRIDS, &SMOOTH, 1.5, 2.5, PI / 0.42 + 1.2 * I);
  assert_near(cimag(k), 1.22352841976042, 1e-8);
  cell_close(&c);
  c = two_layers(0.2, 3.476, 1.444, 0.5);
  k = wavenumber(&c, PK_EY, STACK_GRIDS, &SMOOTH, 1.55, 0, 2.75 * 2 * PI / 1.55);
  assert_near(creal(k) * 1.55 / (2 * PI), 2.78665517, 6e-9);
  cell_close(&c);
  c = two_layers(0.25, 3.476, 1.444, 0.5);
  k = wavenumber(&c, PK_EY, STACK_GRIDS, &SMOOTH, 1.55, 0, PI / 0.25 + 1.4 * I);
  assert_near(20 / log(10) * cimag(k) * 0.25, 3.156771, 6e-7);
  cell_close(&c);
}

/* --- Segmented guides ----------------------------------------------------------------------------
 */

typedef struct guide {
  double pitch, width, n_segment, n_gap, decay;
} guide;

/* Segments of half a pitch in 1.444, gaps filled to the same width. */
static test_cell segmented(const guide *g, bool mirror, double steps) {
  const double index[] = {1.444, g->n_segment, g->n_gap};
  test_cell c = cell_of(PK_LATERAL_OPEN, g->pitch, 0, 0, 3, index);
  if (g->n_gap != 1.444) {
    cell_rect(&c, 2, 0, 0, g->pitch, g->width);
  }
  cell_rect(&c, 1, 0, 0, 0.5 * g->pitch, g->width);
  pk_cell_grid_wish wish = {.steps_per_pitch = steps,
                            .mirror = mirror,
                            .zero_walls = true,
                            .decay_um = {g->decay, g->decay},
                            .reach = {9, 9}};
  cell_lay(&c, &wish);
  return c;
}

static const int GUIDE_GRIDS[GRIDS] = {2, 3, 4};

/* Seen from the side, 3.476 in 1.444, pitch 0.25: edges 0.902771 and 1.348961 µm, found by a
 * Fourier modal and a boundary-integral method; the edge of the laterally odd family at 0.9285 µm
 * lies inside. The whole cell holds both families, half a cell only the even one: the edges must be
 * the same. */
static void the_fundamental_family_is_followed(void **state) {
  (void)state;
  const guide g = {0.25, 0.22, 3.476, 1.444, 0.12};
  test_cell half = segmented(&g, true, 8), whole = segmented(&g, false, 8);
  assert_true(half.base.halved && !whole.base.halved);
  edges a = find(&half, PK_EY, GUIDE_GRIDS, 1, 2 * PI / 1.2);
  edges b = find(&whole, PK_EY, GUIDE_GRIDS, 1, 2 * PI / 1.2);
  for (int i = 0; i < GRIDS; i++) { /* the same numbers by another elimination */
    assert_near(a.low[i], b.low[i], 1e-12 * a.low[i]);
    assert_near(a.high[i], b.high[i], 1e-12 * a.high[i]);
    assert_near(a.attenuation[i], b.attenuation[i], 1e-9 * a.attenuation[i]);
  }
  assert_near(2 * PI / limit(GUIDE_GRIDS, a.low), 1.348961, 2e-6);
  assert_near(2 * PI / limit(GUIDE_GRIDS, a.high), 0.902771, 2e-6);
  cell_close(&half);
  cell_close(&whole);
}

/* Edges and decay from a boundary-integral method (open cases "seg-E-stop-band-single-mode",
 * "seg-H-stop-band" and "seg-H-bridged", eleven digits). ey: 1e-6. hy: the field is singular at the
 * corners, and h² with h⁴ leaves 1e-3. */
static void segmented_guides_decay_as_they_should(void **state) {
  (void)state;
  static const struct {
    guide g;
    pk_polarization polarization;
    double tolerance, edge[2], at[2][2]; /* long and short edge; wavelength, Im k */
  } CASES[] = {{{0.34, 0.3, 2.85, 1.444, 0.25},
                PK_EY,
                1e-6,
                {1.5309677553, 1.1073262809},
                {{1.3973, 1.581048850778194}, {1.2851, 1.8578917756746438}}},
               {{0.38, 0.5, 2.85, 1.444, 0.3},
                PK_HY,
                1e-3,
                {1.5547483453, 1.2841185294},
                {{1.4065, 0.9889109727913127}, {1.4919, 0.7868256828724793}}},
               {{0.3, 0.5, 2.85, 2.2, 0.3},
                PK_HY,
                1e-3,
                {1.4117246584, 1.2794477392},
                {{1.3423, 0.6311729976426423}, {1.3423, 0.6311729976426423}}}};
  for (size_t k = 0; k < sizeof CASES / sizeof CASES[0]; k++) {
    const guide *g = &CASES[k].g;
    double tolerance = CASES[k].tolerance;
    test_cell c = segmented(g, true, 8);
    edges e = find(&c, CASES[k].polarization, GUIDE_GRIDS, 1, 2 * PI / CASES[k].edge[0]);
    assert_near(2 * PI / limit(GUIDE_GRIDS, e.low), CASES[k].edge[0], tolerance * CASES[k].edge[0]);
    assert_near(2 * PI / limit(GUIDE_GRIDS, e.high), CASES[k].edge[1],
                tolerance * CASES[k].edge[1]);
    for (int i = 0; i < 2; i++) {
      double expected = CASES[k].at[i][1];
      double complex kz = wavenumber(&c, CASES[k].polarization, GUIDE_GRIDS, &SMOOTH,
                                     CASES[k].at[i][0], 0, PI / g->pitch + I * 1.03 * expected);
      assert_near(cimag(kz), expected, tolerance * expected);
      assert_true(cimag(kz) < limit(GUIDE_GRIDS, e.attenuation) * (1 + tolerance));
    }
    cell_close(&c);
  }
}

/* A weak guide: order 1 is confined, orders 2 and 3 lie above the light line of the sides. And a
 * trench of low index, which guides nothing. */
static void what_radiates_is_said_to_radiate(void **state) {
  (void)state;
  const guide weak = {0.25, 0.22, 1.5, 1.444, 0.5}, trench = {0.25, 0.22, 1.3, 1.444, 0.5};
  test_cell c = segmented(&weak, true, 6);
  cell_open(&c, PK_EY, 1, 5);
  pk_stop_band_request request = {.pitch_um = 0.25, .last_order = 3, .k0_start = 5, .open = true};
  pk_stop_band bands[3];
  assert_int_equal(pk_stop_bands(c.solver, &c.media, &request, bands), PICKET_OK);
  for (int order = 1; order <= 3; order++) {
    pk_edge_state expected = order == 1 ? PK_EDGE_FOUND : PK_EDGE_RADIATES;
    assert_int_equal(bands[order - 1].edge[0].state, expected);
    assert_int_equal(bands[order - 1].edge[1].state, expected);
    assert_int_equal(bands[order - 1].has_attenuation, order == 1);
  }
  cell_close(&c);
  c = segmented(&trench, true, 6);
  cell_open(&c, PK_EY, 1, 5);
  assert_int_equal(pk_stop_bands(c.solver, &c.media, &request, bands), PICKET_ERROR_NO_MODE);
  assert_non_null(strstr(picket_context_message(c.context), "light line"));
  cell_close(&c);
}

/* cos KΛ of two layers (Yeh, Yariv and Hong 1977), the first dispersive: n² = 1 + 8.5 λ²/(λ² -
 * 0.25²). */
static double half_trace(double k0, double first, double second, double n2) {
  double lambda = 2 * PI / k0, n1 = sqrt(1 + 8.5 * lambda * lambda / (lambda * lambda - 0.0625));
  double a = k0 * n1 * first, b = k0 * n2 * second;
  return cos(a) * cos(b) - 0.5 * (n1 / n2 + n2 / n1) * sin(a) * sin(b);
}

/* At the edges cos KΛ = ±1 with the index at each edge's own wavelength, and the decay is the
 * largest arcosh |cos KΛ| between them (which a scan of 4000 finds to 1e-7). */
static void edges_of_a_dispersive_stack_are_consistent(void **state) {
  (void)state;
  static const double B[] = {8.5}, C[] = {0.25};
  const double n2 = 1.45, first = 0.11, second = 0.13;
  for (int k = 0; k < 4; k++) {
    int order = 1 + k / 2;
    test_cell c = cell_of(PK_LATERAL_UNIFORM, first + second, 0, 0, 1, &n2);
    assert_int_equal(pk_materials_add_sellmeier(c.materials, nowhere, "s", 1, B, C), PICKET_OK);
    cell_layer(&c, 1, -0.05, -0.05 + first);
    pk_cell_grid_wish wish = {.steps_per_pitch = 24};
    cell_lay(&c, &wish);
    edges e = find(&c, (pk_polarization)(k % 2), STACK_GRIDS, order, 6);
    double low = limit(STACK_GRIDS, e.low), high = limit(STACK_GRIDS, e.high);
    double sign = order % 2 ? -1 : 1, most = 0;
    assert_near(half_trace(low, first, second, n2), sign, 1e-8);
    assert_near(half_trace(high, first, second, n2), sign, 1e-8);
    for (int i = 1; i < 4000; i++) {
      double trace = half_trace(low + (high - low) * i / 4000, first, second, n2);
      most = fmax(most, acosh(sign * trace));
    }
    assert_near(limit(STACK_GRIDS, e.attenuation) * (first + second), most, 1e-6 * most);
    cell_close(&c);
  }
}

/* A table that is known to 0.5 µm only, where the edges are not. */
static void edges_where_a_material_is_unknown_are_marked(void **state) {
  (void)state;
  static const double WAVELENGTH[] = {0.2, 0.3, 0.4, 0.5}, N[] = {2.2, 2.1, 2.05, 2.02}, K[4] = {0};
  const double index = 1.45;
  test_cell c = cell_of(PK_LATERAL_UNIFORM, 0.25, 0, 0, 1, &index);
  assert_int_equal(pk_materials_add_table(c.materials, nowhere, "t", 4, WAVELENGTH, N, K),
                   PICKET_OK);
  cell_layer(&c, 1, -0.05, 0.05);
  cell_lay_even(&c, 24, 1);
  cell_open(&c, PK_EY, 1, 6);
  pk_stop_band band;
  pk_stop_band_request request = {.pitch_um = 0.25, .last_order = 1, .k0_start = 6};
  assert_int_equal(pk_stop_bands(c.solver, &c.media, &request, &band), PICKET_OK);
  for (int i = 0; i < 2; i++) {
    assert_int_equal(band.edge[i].state, PK_EDGE_UNKNOWN_MATERIAL);
    assert_true(2 * PI / band.edge[i].k0 > 0.5);
  }
  assert_false(band.has_attenuation);
  cell_close(&c);
}

/* Everything from here on may fail. */
static picket_status find_once(test_cell *c) {
  pk_solver *solver = NULL;
  pk_stop_band band;
  pk_stop_band_request request = {.pitch_um = 0.25, .last_order = 1, .k0_start = 5};
  picket_status status = pk_solver_create(c->context, c->op, &solver);
  if (status == PICKET_OK) {
    status = pk_stop_bands(solver, &c->media, &request, &band);
  }
  pk_solver_free(solver);
  return status;
}

static void every_allocation_may_fail(void **state) {
  (void)state;
  const double index[] = {1, 3};
  for (long n = 1;; n++) {
    short_memory memory = {.fail_at = 0};
    picket_context *context = short_memory_context(&memory);
    test_cell c = cell_in(context, PK_LATERAL_UNIFORM, 0.25, 0, 0, 2, index);
    cell_layer(&c, 1, -0.05, 0.05);
    cell_lay_even(&c, 11, 1);
    cell_open(&c, PK_EY, 1, 5);
    memory.fail_at = memory.asked + n;
    picket_status status = find_once(&c);
    bool failed = memory.asked >= memory.fail_at;
    assert_int_equal(status, failed ? PICKET_ERROR_MEMORY : PICKET_OK);
    cell_close(&c);
    assert_int_equal(memory.living, 0);
    if (!failed) {
      assert_true(n > 50);
      break;
    }
  }
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(quarter_wave_stacks_have_the_closed_gap),
      cmocka_unit_test(other_stacks_have_their_edges),
      cmocka_unit_test(the_second_gap_of_a_quarter_wave_stack_is_closed),
      cmocka_unit_test(waves_in_stacks),
      cmocka_unit_test(the_fundamental_family_is_followed),
      cmocka_unit_test(segmented_guides_decay_as_they_should),
      cmocka_unit_test(what_radiates_is_said_to_radiate),
      cmocka_unit_test(edges_of_a_dispersive_stack_are_consistent),
      cmocka_unit_test(edges_where_a_material_is_unknown_are_marked),
      cmocka_unit_test(every_allocation_may_fail),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
