/* Channels that are uniform in x against the two-dimensional cell. */
#include "channel/channel.h"

#include <math.h>

#include "bloch/resonance.h"
#include "channel/forms.h"
#include "channel/modes.h"
#include "study/extrapolate.h"
#include "unit/cells.h"

enum { STRIPES = 15, WANTED = 4 }; /* base intervals across; modes to choose from */
static const double SPAN = 1.5, THICK = 0.5, PITCH = 0.36;

/* A plane with a stripe of medium 1 across y (or without), periodic in x. */
static pk_geometry *plane_of(picket_context *context, bool tooth) {
  pk_frame frame = {.from = {-0.05, -INFINITY}, .to = {0.05, INFINITY}, .periodic = {true, false}};
  pk_geometry *geometry = NULL;
  assert_int_equal(pk_geometry_create(context, &frame, &geometry), PICKET_OK);
  if (tooth) {
    assert_int_equal(pk_geometry_add_stripe(geometry, nowhere, 1, PK_V, -0.5 * THICK, 0.5 * THICK),
                     PICKET_OK);
  }
  return geometry;
}

static double of_channel(pk_end end, int across, int most, double k, double k0) {
  picket_context *context = NULL;
  assert_int_equal(picket_context_create(NULL, &context), PICKET_OK);
  pk_geometry *plane[2] = {plane_of(context, true), plane_of(context, false)};
  pk_axis x = even_axis(context, -0.05, 0.05, 1, PK_END_PERIODIC);
  pk_axis y = even_axis(context, -0.5 * SPAN, 0.5 * SPAN, across, end);
  const pk_geometry *geometry[2] = {plane[0], plane[1]};
  const double complex inside = 2.2 * 2.2, outside = 1.4 * 1.4;
  pk_channel_plan plan = {.pitch = PITCH,
                          .slices = 2,
                          .from = (const double[]){-0.09, 0.09, 0.27},
                          .geometry = geometry,
                          .x = &x,
                          .y = &y,
                          .media = 2,
                          .low = -most - 1,
                          .high = most,
                          .origin = NAN};
  const double complex permittivity[6] = {outside, inside, outside, inside, outside, inside};
  pk_channel *channel = NULL;
  pk_channel_mode modes[WANTED] = {{0}};
  int count = 0;
  assert_int_equal(pk_channel_create(context, &plan, &channel), PICKET_OK);
  assert_int_equal(pk_channel_load(channel, permittivity), PICKET_OK);
  assert_int_equal(
      pk_channel_modes_at_k(channel, k, k0 * k0 * (1 - 1e-6), WANTED, NULL, modes, &count),
      PICKET_OK);
  /* Both polarizations are in one spectrum: the nearest of the wanted one. */
  double found = INFINITY;
  for (int i = 0; i < count; i++) {
    pk_channel_looks looks;
    pk_channel_look(channel, modes[i].right, &looks);
    double at = sqrt(creal(modes[i].k0_square));
    bool along_x = looks.ex_share > 0.5;
    if (along_x == (end == PK_END_ZERO) && fabs(at - k0) < fabs(found - k0)) {
      found = at;
    }
    assert_true(looks.ex_share < 1e-9 || looks.ex_share > 1 - 1e-9);
  }
  pk_channel_modes_clear(context, count, modes);
  pk_channel_free(channel);
  pk_axis_clear(context, &x);
  pk_axis_clear(context, &y);
  pk_geometry_free(plane[0]);
  pk_geometry_free(plane[1]);
  picket_context_free(context);
  return found;
}

/* Walls at which the unknown of the cell (E_x or H_x) vanishes; intervals along and across. */
static double of_cell(pk_polarization polarization, int along, int across, double kz, double k0) {
  const double index[] = {1.4, 2.2};
  test_cell c = cell_of(PK_LATERAL_ELECTRIC, PITCH, SPAN, 0, 2, index);
  cell_rect(&c, 1, 0, 0, 0.18, THICK);
  cell_lay_even(&c, along, across);
  cell_open(&c, polarization, 1, k0);
  if (polarization == PK_HY) {
    assert_int_equal(pk_operator_correct_corners(c.op, c.cell.geometry), PICKET_OK);
  }
  pk_resonance mode = {0};
  assert_int_equal(
      pk_resonance_near(c.solver, &c.media, pk_phase_at(&c.cell, kz, 0), k0, NULL, &mode),
      PICKET_OK);
  double found = mode.k0;
  pk_resonance_clear(c.context, &mode);
  cell_close(&c);
  return found;
}

/* E along the teeth: across, both have the same differences, so the cell with finer and finer steps
 * along z becomes the channel of the same lines, to what is left of h⁴ and M⁻³. */
static void uniform_in_x_is_the_cell_ey(void **state) {
  (void)state;
  const double kz = 0.7, k = kz * PI / PITCH;
  double rough = of_cell(PK_EY, 24, STRIPES, kz, k / 1.6);
  double channel = of_channel(PK_END_ZERO, STRIPES, 8, k, rough);
  const int m[3] = {2, 3, 4};
  double values[3];
  for (int i = 0; i < 3; i++) {
    values[i] = of_cell(PK_EY, 24 * m[i], STRIPES, kz, channel);
  }
  pk_error_law law = {.count = 2, .exponent = {2, 4}};
  picket_quantity q = pk_extrapolate(&law, 3, m, values);
  assert_near(q.value / channel, 1, 2e-6);
}

/* H along the teeth: both extrapolated, the channel with the exponent 2α = 1.6 or so of the edges,
 * which leaves about a thousandth of its grid error of 1e-2. */
static void uniform_in_x_is_the_cell_hy(void **state) {
  (void)state;
  const double kz = 0.7, k = kz * PI / PITCH;
  const int m[3] = {2, 3, 4};
  double values[3], cells[3];
  for (int i = 0; i < 3; i++) {
    cells[i] = of_cell(PK_HY, 24 * m[i], STRIPES * m[i], kz, i == 0 ? k / 1.5 : cells[0]);
    values[i] = of_channel(PK_END_FREE, STRIPES * m[i], 7, k, cells[i]);
  }
  pk_error_law channel = {.count = 2, .exponent = {1.7, 2}},
               cell = {.count = 2, .exponent = {2, 4}};
  picket_quantity a = pk_extrapolate(&channel, 3, m, values);
  picket_quantity b = pk_extrapolate(&cell, 3, m, cells);
  assert_near(a.value / b.value, 1, 2e-4);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(uniform_in_x_is_the_cell_ey),
      cmocka_unit_test(uniform_in_x_is_the_cell_hy),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
