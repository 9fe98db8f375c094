/* Bent sections. A bent slab has an exact answer in Bessel functions of complex order ν = βR: with
 * k = k0 n, J_ν(kr) inside the bend, A J_ν + B Y_ν in the film, H¹_ν outside, and E_y (TE) or h_y
 * (TM) and its slope (over ε for TM) continuous (E. A. J. Marcatili, Bell Syst. Tech. J. 48, 2103
 * (1969)). tests/reference/bent_slab.py finds the numbers below. */
#include "section/outflow.h"

#include "unit/section/plane.h"

static const double WAVELENGTH = 1.55, WIDTH = 0.5;
static const double complex FILM[PLANE_MEDIA] = {1.45, 2.0, 1};

typedef struct bent_slab {
  bool tm;
  double radius;
  double complex index;
} bent_slab;

static const bent_slab SLABS[] = {
    {false, 5, 1.8100990029328 + 6.1674546868712e-4 * I},
    {false, 7, 1.8046566812135 + 5.0895043540273e-5 * I},
    {false, 15, 1.8005625114352 + 1.7693965222171e-9 * I},
    {false, 25, 1.7998722320324 + 4.275743202e-15 * I},
    {false, 35, 1.7996835440611 + 1.015344946e-20 * I},
    {true, 5, 1.7344903346964 + 3.7819397892487e-3 * I},
    {true, 10, 1.7208558470409 + 6.1961785613805e-5 * I},
};
enum { SLABS_COUNT = sizeof SLABS / sizeof *SLABS };

/* The slab between walls that let its fields be uniform along y; outside an absorbing layer from a
 * little beyond the caustic, where the wave outside would be as fast as light. */
static plane slab_plane(const bent_slab *slab) {
  plane p = plane_of(FILM, 0);
  p.curvature = 1 / slab->radius;
  assert_int_equal(pk_geometry_add_stripe(p.geometry, nowhere, 1, PK_U, -WIDTH / 2, WIDTH / 2),
                   PICKET_OK);
  double caustic = slab->radius * (creal(slab->index) / creal(FILM[0]) - 1);
  double lines[] = {-WIDTH / 2, WIDTH / 2};
  pk_axis_wish x = {.low = PK_END_ZERO,
                    .high = PK_END_ZERO,
                    .from = -3.5,
                    .to = caustic + 3.5,
                    .line_count = 2,
                    .lines = lines,
                    .step = 0.06,
                    .inner_from = -WIDTH / 2,
                    .inner_to = WIDTH / 2,
                    .outer_step = 0.08,
                    .growth = 0.3,
                    .layer = {{0, 0}, {3, 4}},
                    .least_intervals = 1};
  assert_int_equal(pk_axis_lay(p.context, &x, &p.x), PICKET_OK);
  pk_end wall = slab->tm ? PK_END_FREE : PK_END_ZERO;
  lay_ruler(p.context, &(ruler){wall, wall, 0, 0.2, 1, 0.1, 0.1, 0, {0}}, &p.y);
  return p;
}

enum { GRIDS = 4 };
static const int MEMBERS[GRIDS] = {2, 3, 4, 6};

/* Index and loss (as Im n) of the mode nearest to the reference, from four grids. */
static void exact_of_a_slab(const bent_slab *slab) {
  const double k0 = 2 * PI / WAVELENGTH;
  plane p = slab_plane(slab);
  double index[GRIDS], loss[GRIDS];
  for (int g = 0; g < GRIDS; g++) {
    pk_section *section = plane_section(&p, MEMBERS[g], true);
    pk_section_mode mode;
    pk_section_fields fields;
    int found = 0;
    double complex beta = k0 * slab->index;
    assert_int_equal(pk_section_modes(section, k0, beta * beta, 1, &mode, &found), PICKET_OK);
    assert_int_equal(pk_section_fields_take(section, k0, &mode, &fields), PICKET_OK);
    index[g] = creal(mode.beta) / k0;
    double caustic = slab->radius * (creal(slab->index) / creal(FILM[0]) - 1);
    loss[g] = pk_section_outflow(section, &fields, caustic) / k0;
    /* The same by the power that leaves: to the rounding of β. */
    assert_near(loss[g], cimag(mode.beta) / k0, 1e-11);
    pk_section_fields_clear(&fields);
    pk_section_modes_clear(p.context, found, &mode);
    pk_section_free(section);
  }
  pk_error_law law = {.count = 2, .exponent = {2, 4}, .smooth = 1};
  picket_quantity n = pk_extrapolate(&law, GRIDS, MEMBERS, index);
  picket_quantity a = pk_extrapolate(&law, GRIDS, MEMBERS, loss);
  /* Four grids leave 1e-10 of the index and, below what β itself could show, 3e-6 of the loss. */
  assert_near(n.value, creal(slab->index), 1e-8);
  assert_near(a.value / cimag(slab->index), 1, 1e-4);
  assert_true(fabs(n.value - creal(slab->index)) < n.uncertainty);
  plane_close(&p);
}

static void a_bent_slab(void **state) {
  (void)state;
  for (int i = 0; i < SLABS_COUNT; i++) {
    exact_of_a_slab(&SLABS[i]);
  }
}

/* A rod in a metal box bent more and more: real, and its index rises as the square of the
 * curvature, because the box and the rod are symmetric. */
static void straightens_as_the_square(void **state) {
  (void)state;
  const double complex index[PLANE_MEDIA] = {1.45, 2.4, 1};
  const double k0 = 2 * PI / WAVELENGTH;
  double found[3];
  for (int i = 0; i < 3; i++) {
    plane p = plane_of(index, 0);
    plane_rect(&p, 1, 0, 0, 0.5, 0.3);
    p.curvature = i == 0 ? 0 : 0.01 * i;
    lay_ruler(p.context,
              &(ruler){PK_END_ZERO, PK_END_ZERO, -1, 1, 0.25, 0.06, 0.1, 2, {-0.25, 0.25}}, &p.x);
    lay_ruler(p.context,
              &(ruler){PK_END_ZERO, PK_END_ZERO, -1, 1, 0.15, 0.06, 0.1, 2, {-0.15, 0.15}}, &p.y);
    plane_indices(&p, 1, true, k0, 2.4, 1, &found[i]);
    plane_close(&p);
  }
  assert_true(found[1] > found[0]);
  /* the next term is the fourth power: (0.02 µm⁻¹ times some µm)² of it */
  assert_near((found[2] - found[0]) / (found[1] - found[0]), 4, 0.02);
}

int main(void) {
  const struct CMUnitTest tests[] = {cmocka_unit_test(a_bent_slab),
                                     cmocka_unit_test(straightens_as_the_square)};
  return cmocka_run_group_tests(tests, NULL, NULL);
}
