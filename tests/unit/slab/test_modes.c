/* Modes of film stacks against closed-form roots: values to all digits shown were computed apart
 * from this code with 40-digit transfer matrices (reference cases O01 and O02 and the slab table).
 */
#include <math.h>
#include <string.h>

#include "slab/slab.h"
#include "unit/near.h"
#include "unit/short_memory.h"

/* Reference digits end at 1e-16; the root is good to a few roundings of n² over dΘ/db of order 1.
 */
static const double tight = 1e-13;
static const double pi = 3.14159265358979323846;

static picket_context *context;

static int set_up(void **state) {
  (void)state;
  return picket_context_create(NULL, &context);
}

static int tear_down(void **state) {
  (void)state;
  picket_context_free(context);
  return 0;
}

static pk_slab_medium plain(double n) {
  return pk_slab_isotropic(n * n, 0);
}

static int solve(const pk_slab *slab, pk_slab_polarization polarization, double wavelength,
                 int capacity, pk_slab_mode *modes) {
  int count = -1;
  assert_int_equal(pk_slab_modes(context, slab, polarization, wavelength, capacity, modes, &count),
                   PICKET_OK);
  return count;
}

static int solve_film(double substrate, double film, double cover, double thickness,
                      double wavelength, pk_slab_polarization polarization, pk_slab_mode *modes) {
  pk_slab_film films[1] = {{plain(film), thickness}};
  pk_slab slab = {plain(substrate), 1, films, plain(cover)};
  return solve(&slab, polarization, wavelength, 8, modes);
}

/* Case O01. */
static void symmetric_film_to_reference(void **state) {
  (void)state;
  pk_slab_mode modes[8];
  assert_int_equal(solve_film(1.444, 3.4757, 1.444, 0.22, 1.55, PK_SLAB_TE, modes), 1);
  assert_near(creal(modes[0].index), 2.8474855403429036, tight);
  assert_near(creal(modes[0].group_index), 3.57641530464559, tight);
  assert_true(cimag(modes[0].index) == 0);
  assert_int_equal(solve_film(1.444, 3.4757, 1.444, 0.22, 1.55, PK_SLAB_TM, modes), 1);
  assert_near(creal(modes[0].index), 2.053097506040335, tight);
  assert_near(creal(modes[0].group_index), 3.8591050525489785, tight);
}

/* Case O02: all modes of an asymmetric film, with group index. */
static void multimode_film_to_reference(void **state) {
  (void)state;
  static const double te[4][2] = {{1.9671928523518638, 2.023185146533797},
                                  {1.8666746948974338, 2.096645864298287},
                                  {1.692431807093194, 2.227514147455648},
                                  {1.4536198516422818, 1.9839512481455137}};
  static const double tm[3][2] = {{1.960423130139365, 2.0345624529009854},
                                  {1.839270024637003, 2.1417109813871837},
                                  {1.6337944902630694, 2.2924467838457283}};
  pk_slab_mode modes[8];
  assert_int_equal(solve_film(1.45, 2.0, 1.0, 1.0, 0.85, PK_SLAB_TE, modes), 4);
  for (int m = 0; m < 4; m++) {
    assert_int_equal(modes[m].order, m);
    assert_near(creal(modes[m].index), te[m][0], tight);
    assert_near(creal(modes[m].group_index), te[m][1], 1e-12);
  }
  assert_int_equal(solve_film(1.45, 2.0, 1.0, 1.0, 0.85, PK_SLAB_TM, modes), 3);
  for (int m = 0; m < 3; m++) {
    assert_near(creal(modes[m].index), tm[m][0], tight);
    assert_near(creal(modes[m].group_index), tm[m][1], 1e-12);
  }
}

/* The slab table: ten digits shown, so half a unit of the last. */
static void slab_table(void **state) {
  (void)state;
  static const struct {
    double cover, film, thickness, te, tm;
  } rows[] = {{1.444, 3.476, 0.22, 2.8477822434, 2.0533196788},
              {1.0, 3.476, 0.22, 2.8308824381, 1.8908180079},
              {1.444, 3.476, 0.30, 3.0491613392, 2.6161352312},
              {1.444, 1.996, 0.40, 1.7433949107, 1.6416804334}};
  pk_slab_mode modes[8];
  for (int i = 0; i < 4; i++) {
    solve_film(1.444, rows[i].film, rows[i].cover, rows[i].thickness, 1.55, PK_SLAB_TE, modes);
    assert_near(creal(modes[0].index), rows[i].te, 0.51e-10);
    solve_film(1.444, rows[i].film, rows[i].cover, rows[i].thickness, 1.55, PK_SLAB_TM, modes);
    assert_near(creal(modes[0].index), rows[i].tm, 0.51e-10);
  }
  solve_film(1.444, 3.476, 1.444, 0.22, 1.55, PK_SLAB_TE, modes);
  assert_near(creal(modes[0].group_index), 3.57675748, 0.51e-8);
  solve_film(1.444, 3.476, 1.444, 0.22, 1.55, PK_SLAB_TM, modes);
  assert_near(creal(modes[0].group_index), 3.85992095, 0.51e-8);
}

/* A symmetric film guides 1 + floor(2 d √(n² - n_c²) / λ) modes of either polarization; an
 * asymmetric one below π V cut-off none. */
static void counts_follow_the_closed_form(void **state) {
  (void)state;
  pk_slab_mode modes[8];
  for (int i = 1; i < 60; i++) {
    double d = 0.137 * i;
    int expected = 1 + (int)floor(2 * d * sqrt(2.0 * 2.0 - 1.444 * 1.444) / 1.55);
    assert_int_equal(solve_film(1.444, 2.0, 1.444, d, 1.55, PK_SLAB_TE, modes), expected);
    assert_int_equal(solve_film(1.444, 2.0, 1.444, d, 1.55, PK_SLAB_TM, modes), expected);
  }
  /* TE0 appears at k0 d √(n² - n_s²) = atan √((n_s² - n_c²)/(n² - n_s²)), TM0 at the same with
   * (n/n_c)² before the root. */
  double depth = 4.0 - 1.444 * 1.444, lift = 1.444 * 1.444 - 1;
  double cut = atan(sqrt(lift / depth)) * 1.55 / (2 * pi * sqrt(depth));
  assert_int_equal(solve_film(1.444, 2.0, 1.0, cut * 0.999999, 1.55, PK_SLAB_TE, modes), 0);
  assert_int_equal(solve_film(1.444, 2.0, 1.0, cut * 1.000001, 1.55, PK_SLAB_TE, modes), 1);
  cut = atan(4 * sqrt(lift / depth)) * 1.55 / (2 * pi * sqrt(depth));
  assert_int_equal(solve_film(1.444, 2.0, 1.0, cut * 0.999999, 1.55, PK_SLAB_TM, modes), 0);
  assert_int_equal(solve_film(1.444, 2.0, 1.0, cut * 1.000001, 1.55, PK_SLAB_TM, modes), 1);
}

/* A film of lower index than its surroundings guides nothing. */
static void a_low_film_guides_nothing(void **state) {
  (void)state;
  pk_slab_mode modes[8];
  assert_int_equal(solve_film(1.5, 1.4, 1.5, 2.0, 1.0, PK_SLAB_TE, modes), 0);
  assert_int_equal(solve_film(1.5, 1.5, 1.5, 2.0, 1.0, PK_SLAB_TM, modes), 0);
}

/* Cutting a film in two, or turning the stack over, changes nothing. */
static void the_same_stack_written_otherwise(void **state) {
  (void)state;
  pk_slab_film films[3] = {{plain(1.8), 0.3}, {plain(2.1), 0.5}, {plain(1.6), 0.4}};
  pk_slab_film split[5] = {{plain(1.8), 0.3},
                           {plain(2.1), 0.1},
                           {plain(2.1), 0.4},
                           {plain(1.6), 1e-3},
                           {plain(1.6), 0.399}};
  pk_slab_film turned[3] = {films[2], films[1], films[0]};
  pk_slab slabs[3] = {{plain(1.45), 3, films, plain(1.0)},
                      {plain(1.45), 5, split, plain(1.0)},
                      {plain(1.0), 3, turned, plain(1.45)}};
  for (int pol = 0; pol < 2; pol++) {
    pk_slab_mode modes[3][8];
    int counts[3];
    for (int i = 0; i < 3; i++) {
      counts[i] = solve(&slabs[i], (pk_slab_polarization)pol, 0.85, 8, modes[i]);
      assert_int_equal(counts[i], counts[0]);
    }
    assert_true(counts[0] >= 2);
    for (int m = 0; m < counts[0]; m++) {
      for (int i = 1; i < 3; i++) {
        assert_near(creal(modes[i][m].index), creal(modes[0][m].index), tight);
        assert_near(creal(modes[i][m].group_index), creal(modes[0][m].group_index), 1e-12);
      }
    }
  }
}

/* n_TE of a symmetric film from its own tangent, evenly spaced cores far apart: all roots there. */
static void far_apart_cores_keep_all_their_modes(void **state) {
  (void)state;
  pk_slab_mode alone[8], modes[8];
  for (int pol = 0; pol < 2; pol++) {
    pk_slab_polarization polarization = (pk_slab_polarization)pol;
    assert_int_equal(solve_film(1.444, 3.476, 1.444, 0.22, 1.55, polarization, alone), 1);
    static const double gaps[] = {0.4, 1.0, 3.0, 30.0, 3000.0};
    for (int i = 0; i < 5; i++) {
      pk_slab_film films[5] = {{plain(3.476), 0.22},
                               {plain(1.444), gaps[i]},
                               {plain(3.476), 0.22},
                               {plain(1.444), gaps[i]},
                               {plain(3.476), 0.22}};
      pk_slab slab = {plain(1.444), 5, films, plain(1.444)};
      assert_int_equal(solve(&slab, polarization, 1.55, 8, modes), 3);
      /* The splitting falls as exp(-γ gap), γ = k0 √(n² - 1.444²); 2 covers its factor. */
      double n = creal(alone[0].index), gamma = 2 * pi / 1.55 * sqrt(n * n - 1.444 * 1.444);
      double split = 2 * exp(-gamma * gaps[i]);
      for (int m = 0; m < 3; m++) {
        assert_near(creal(modes[m].index), n, split + tight);
        /* n_g moves with the splitting times the phase length of the gap. */
        assert_near(creal(modes[m].group_index), creal(alone[0].group_index),
                    split * (30 + gaps[i] * 30) + 1e-12);
      }
      if (split > 1e-10) {
        assert_true(creal(modes[0].index) > creal(modes[1].index));
        assert_true(creal(modes[1].index) > creal(modes[2].index));
      }
    }
  }
}

/* Three equal cores with coupling c: n + √2 c, n, n - √2 c to first order in c. At 2 µm c is near
 * 1e-9, so the next order is 1e-9 of it and rounding of n 1e-6 of it. */
static void three_cores_split_evenly(void **state) {
  (void)state;
  pk_slab_mode alone[8], modes[8];
  solve_film(1.444, 3.476, 1.444, 0.22, 1.55, PK_SLAB_TE, alone);
  pk_slab_film core = {plain(3.476), 0.22}, gap = {plain(1.444), 2.0};
  pk_slab_film films[5] = {core, gap, core, gap, core};
  pk_slab slab = {plain(1.444), 5, films, plain(1.444)};
  assert_int_equal(solve(&slab, PK_SLAB_TE, 1.55, 8, modes), 3);
  double upper = creal(modes[0].index) - creal(modes[1].index);
  double lower = creal(modes[1].index) - creal(modes[2].index);
  assert_true(upper > 1e-10 && upper < 1e-8);
  assert_near(upper / lower, 1, 1e-5);
  assert_near((creal(modes[1].index) - creal(alone[0].index)) / upper, 0, 1e-5);
  /* Two of the cores split by 2c = √2 times that. */
  slab.film_count = 3;
  assert_int_equal(solve(&slab, PK_SLAB_TE, 1.55, 8, modes), 2);
  assert_near((creal(modes[0].index) - creal(modes[1].index)) / upper, sqrt(2.0), 1e-5);
}

/* Unequal cores 100 µm apart: each mode is that of one core, and its n_g too. */
static void unequal_cores_far_apart(void **state) {
  (void)state;
  pk_slab_mode thin[8], thick[8], modes[8];
  for (int pol = 0; pol < 2; pol++) {
    pk_slab_polarization polarization = (pk_slab_polarization)pol;
    solve_film(1.444, 3.476, 1.444, 0.20, 1.55, polarization, thin);
    solve_film(1.444, 3.476, 1.444, 0.22, 1.55, polarization, thick);
    pk_slab_film films[3] = {{plain(3.476), 0.20}, {plain(1.444), 100}, {plain(3.476), 0.22}};
    pk_slab slab = {plain(1.444), 3, films, plain(1.444)};
    assert_int_equal(solve(&slab, polarization, 1.55, 8, modes), 2);
    assert_near(creal(modes[0].index), creal(thick[0].index), tight);
    assert_near(creal(modes[1].index), creal(thin[0].index), tight);
    assert_near(creal(modes[0].group_index), creal(thick[0].group_index), 1e-12);
    assert_near(creal(modes[1].group_index), creal(thin[0].group_index), 1e-12);
  }
}

/* A film whose index is that of the mode (q = 0 in it) is nothing special: the flat film between
 * two halves of a core of phase κ d = 2 atan(γ/κ) leaves the mode as it is, however thick. */
static void flat_field_inside(void **state) {
  (void)state;
  double n = 1.7, core = 2.0, clad = 1.45, k0 = 2 * pi / 1.0;
  double kappa = sqrt(core * core - n * n), gamma = sqrt(n * n - clad * clad);
  double half = atan(gamma / kappa) / kappa / k0;
  static const double flats[] = {1e-6, 0.01, 1.0, 40.0};
  for (int i = 0; i < 4; i++) {
    pk_slab_film films[3] = {{plain(core), half}, {plain(n), flats[i]}, {plain(core), half}};
    pk_slab slab = {plain(clad), 3, films, plain(clad)};
    pk_slab_mode modes[64];
    int count = solve(&slab, PK_SLAB_TE, 1.0, 64, modes);
    assert_true(count >= 1);
    assert_near(creal(modes[0].index), n, tight);
    /* n n_g = Σ∫εψ²/∫ψ² with ψ = 1 in the flat film, cos κx in the cores, exp(-γx) outside. */
    double a = kappa * half * k0, end = cos(a);
    double in_core = (half * k0 / 2 + sin(2 * a) / (4 * kappa)) * 2, out = end * end / gamma;
    double in_flat = flats[i] * k0;
    double expected = (core * core * in_core + n * n * in_flat + clad * clad * out) /
                      (in_core + in_flat + out) / n;
    assert_near(creal(modes[0].group_index), expected, 1e-12);
  }
}

/* Anisotropic film and surroundings, TM even: κ tan(κ d/2) / ε_z = γ / ε_zc with
 * κ² = k0² ε_z (1 - n²/ε_x), γ² = k0² ε_zc (n²/ε_xc - 1): bisected here by hand. */
static void anisotropic_film(void **state) {
  (void)state;
  const double ex = 6.0, ez = 4.5, cx = 2.2, cz = 2.0, d = 0.3, k0 = 2 * pi / 1.55;
  double low = sqrt(cx), high = sqrt(ex);
  for (int i = 0; i < 200; i++) {
    double n = 0.5 * (low + high);
    double kappa = k0 * sqrt(ez * (1 - n * n / ex)), gamma = k0 * sqrt(cz * (n * n / cx - 1));
    double excess = kappa * sin(kappa * d / 2) / ez - gamma / cz * cos(kappa * d / 2);
    *(excess > 0 ? &low : &high) = n;
  }
  pk_slab_medium film = {ex, 9.0, ez, 0, 0, 0}, outer = {cx, 8.0, cz, 0, 0, 0};
  pk_slab_film films[1] = {{film, d}};
  pk_slab slab = {outer, 1, films, outer};
  pk_slab_mode modes[4];
  assert_int_equal(solve(&slab, PK_SLAB_TM, 1.55, 4, modes), 1);
  assert_near(creal(modes[0].index), low, tight);
  /* TE sees ε_y alone. */
  pk_slab_mode isotropic[4];
  assert_int_equal(solve(&slab, PK_SLAB_TE, 1.55, 4, modes),
                   solve_film(sqrt(8.0), 3.0, sqrt(8.0), d, 1.55, PK_SLAB_TE, isotropic));
  assert_near(creal(modes[0].index), creal(isotropic[0].index), tight);
}

/* ε = a + c k0² has k0 dε/dk0 = 2 c k0²: analytic n_g against differences of n. */
static pk_slab_medium dispersive(const double a[3], double c, double k0) {
  double part = c * k0 * k0;
  return (pk_slab_medium){a[0] + part, a[1] + 1.1 * part, a[2] + 1.3 * part,
                          2 * part,    2.2 * part,        2.6 * part};
}

static void dispersive_index(pk_slab_polarization polarization, double k0, int order,
                             pk_slab_mode *out) {
  static const double glass[3] = {2.1, 2.15, 2.05}, core[3] = {6.0, 5.6, 5.0},
                      rib[3] = {4, 4.1, 3.9};
  pk_slab_film films[3] = {{dispersive(core, 0.03, k0), 0.5},
                           {dispersive(rib, 0.01, k0), 0.8},
                           {dispersive(core, 0.02, k0), 0.3}};
  pk_slab slab = {dispersive(glass, 0.004, k0), 3, films, dispersive(glass, 0.001, k0)};
  pk_slab_mode modes[8];
  assert_in_range(order, 0, solve(&slab, polarization, 2 * pi / k0, 8, modes) - 1);
  *out = modes[order];
}

static void group_index_is_the_derivative(void **state) {
  (void)state;
  const double k0 = 2 * pi / 1.3, h = 1e-3;
  for (int pol = 0; pol < 2; pol++) {
    for (int m = 0; m < 3; m++) {
      pk_slab_mode at, side;
      double kn[4];
      static const int steps[4] = {-2, -1, 1, 2};
      for (int i = 0; i < 4; i++) {
        double k = k0 * (1 + steps[i] * h);
        dispersive_index((pk_slab_polarization)pol, k, m, &side);
        kn[i] = k * creal(side.index);
      }
      dispersive_index((pk_slab_polarization)pol, k0, m, &at);
      double difference = (kn[0] - 8 * kn[1] + 8 * kn[2] - kn[3]) / (12 * h * k0);
      /* Fourth order in h = 1e-3: 1e-12 times derivatives up to 1e2; rounding 1e-15/h. */
      assert_near(creal(at.group_index), difference, 1e-9);
    }
  }
}

/* Weak absorption: Im n = Σ pull Im ε / 2n to first order, and full absorption agrees with a direct
 * complex root of κ tan(κ d/2) = γ (TE even). */
static void absorption(void **state) {
  (void)state;
  const double complex film_index = 3.476 + 0.05 * I;
  const double d = 0.22, k0 = 2 * pi / 1.55;
  pk_slab_film films[1] = {{pk_slab_isotropic(film_index * film_index, 0), d}};
  pk_slab slab = {plain(1.444), 1, films, plain(1.444)};
  pk_slab_mode modes[4];
  assert_int_equal(solve(&slab, PK_SLAB_TE, 1.55, 4, modes), 1);
  double complex b = modes[0].index * modes[0].index;
  double complex kappa = k0 * csqrt(film_index * film_index - b);
  double complex gamma = k0 * csqrt(b - 1.444 * 1.444);
  assert_near(cabs(kappa * ctan(kappa * d / 2) - gamma) / cabs(gamma), 0, 1e-13);
  assert_true(cimag(modes[0].index) > 0);
  for (int pol = 0; pol < 2; pol++) {
    const double loss = 1e-9;
    pk_slab_polarization polarization = (pk_slab_polarization)pol;
    films[0].medium = plain(3.476);
    pk_slab_mode clear, dull;
    pk_slab_pull pulls[3];
    assert_int_equal(
        pk_slab_mode_of_order(context, &slab, polarization, 1.55, 0, &clear, pulls, NULL),
        PICKET_OK);
    films[0].medium = pk_slab_isotropic(3.476 * 3.476 + I * loss, 0);
    assert_int_equal(
        pk_slab_mode_of_order(context, &slab, polarization, 1.55, 0, &dull, NULL, NULL), PICKET_OK);
    double pull = creal(pulls[1].normal + pulls[1].across + pulls[1].along);
    /* Next order is loss²; roundings of Im n are 1e-16 of n. */
    assert_near(cimag(dull.index) / loss, pull / (2 * creal(clear.index)), 1e-6);
    assert_near(creal(dull.index), creal(clear.index), tight);
  }
}

/* Pulls are derivatives of n²: against exact solves a little to each side. */
static void pulls_are_derivatives(void **state) {
  (void)state;
  const double h = 1e-4;
  for (int pol = 0; pol < 2; pol++) {
    pk_slab_polarization polarization = (pk_slab_polarization)pol;
    for (int which = 0; which < 4; which++) {
      for (int entry = 0; entry < 3; entry++) {
        double b[2], pull = 0;
        for (int side = -1; side <= 1; side++) {
          pk_slab_medium media[4] = {plain(1.45), plain(2.0), plain(2.3), plain(1.2)};
          double complex *entries[3] = {&media[which].normal, &media[which].across,
                                        &media[which].along};
          *entries[entry] += side * h;
          pk_slab_film films[2] = {{media[1], 0.2}, {media[2], 0.25}};
          pk_slab slab = {media[0], 2, films, media[3]};
          pk_slab_mode mode;
          pk_slab_pull pulls[4];
          assert_int_equal(
              pk_slab_mode_of_order(context, &slab, polarization, 1.55, 0, &mode, pulls, NULL),
              PICKET_OK);
          if (side == 0) {
            const pk_slab_pull *p = &pulls[which];
            pull = creal(entry == 0 ? p->normal : entry == 1 ? p->across : p->along);
          } else {
            b[side > 0] = creal(mode.index * mode.index);
          }
        }
        /* h² = 1e-8 times a third derivative of order 1, divided by 6. */
        assert_near(pull, (b[1] - b[0]) / (2 * h), 1e-8);
      }
    }
  }
}

/* k0 d of thousands: no overflow, and the count is still the closed form. */
static void very_thick_films(void **state) {
  (void)state;
  pk_slab_mode modes[8];
  double d = 2000;
  int expected = 1 + (int)floor(2 * d * sqrt(2.0 * 2.0 - 1.444 * 1.444) / 1.55);
  assert_int_equal(solve_film(1.444, 2.0, 1.444, d, 1.55, PK_SLAB_TE, modes), expected);
  /* Far from cut-off κ d = π (1 - 2/(γ d)) to second order in 1/γd: an effective width. */
  double gamma = 2 * pi / 1.55 * sqrt(4 - 1.444 * 1.444), kappa = pi / (d + 2 / gamma);
  double across = kappa * 1.55 / (2 * pi);
  assert_near(creal(modes[0].index), sqrt(4 - across * across), 1e-12);
}

/* At the cut-off of a symmetric film of almost no thickness the light is all in the surroundings.
 */
static void almost_no_film(void **state) {
  (void)state;
  pk_slab_mode modes[8];
  assert_int_equal(solve_film(1.444, 3.476, 1.444, 1e-9, 1.55, PK_SLAB_TE, modes), 1);
  assert_near(creal(modes[0].index), 1.444, 1e-12);
  assert_near(creal(modes[0].group_index), 1.444, 1e-6);
}

static void refusals(void **state) {
  (void)state;
  pk_slab_film films[1] = {{pk_slab_isotropic(-100 + 5 * I, 0), 0.2}};
  pk_slab slab = {plain(1.444), 1, films, plain(1.0)};
  pk_slab_mode mode = {.order = 77};
  int count = 77;
  assert_int_equal(pk_slab_modes(context, &slab, PK_SLAB_TM, 1.55, 1, &mode, &count),
                   PICKET_ERROR_UNSUPPORTED);
  assert_int_equal(count, 77);
  assert_non_null(strstr(picket_context_message(context), "-100"));
  films[0].medium = plain(3.476);
  assert_int_equal(pk_slab_mode_of_order(context, &slab, PK_SLAB_TE, 1.55, 3, &mode, NULL, &count),
                   PICKET_ERROR_NO_MODE);
  assert_int_equal(count, 1);
  assert_int_equal(mode.order, 77);
  /* More modes than fit are counted. */
  assert_int_equal(pk_slab_modes(context, &slab, PK_SLAB_TE, 0.3, 1, &mode, &count), PICKET_OK);
  assert_true(count > 1);
  assert_int_equal(mode.order, 0);
}

static void every_allocation_fails_once(void **state) {
  (void)state;
  pk_slab_film films[1] = {{pk_slab_isotropic(9 + 0.1 * I, 0), 0.4}};
  pk_slab slab = {plain(1.444), 1, films, plain(1.0)};
  picket_status status = PICKET_ERROR_MEMORY;
  for (long n = 2; status == PICKET_ERROR_MEMORY; n++) {
    short_memory memory = {.fail_at = n};
    picket_context *scarce = short_memory_context(&memory);
    pk_slab_mode modes[4];
    int count = 77;
    status = pk_slab_modes(scarce, &slab, PK_SLAB_TE, 1.55, 4, modes, &count);
    assert_true(status == PICKET_OK ? n > 10 : count == 77);
    picket_context_free(scarce);
    assert_int_equal(memory.living, 0);
  }
  assert_int_equal(status, PICKET_OK);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(symmetric_film_to_reference),
      cmocka_unit_test(multimode_film_to_reference),
      cmocka_unit_test(slab_table),
      cmocka_unit_test(counts_follow_the_closed_form),
      cmocka_unit_test(a_low_film_guides_nothing),
      cmocka_unit_test(the_same_stack_written_otherwise),
      cmocka_unit_test(far_apart_cores_keep_all_their_modes),
      cmocka_unit_test(three_cores_split_evenly),
      cmocka_unit_test(unequal_cores_far_apart),
      cmocka_unit_test(flat_field_inside),
      cmocka_unit_test(anisotropic_film),
      cmocka_unit_test(group_index_is_the_derivative),
      cmocka_unit_test(absorption),
      cmocka_unit_test(pulls_are_derivatives),
      cmocka_unit_test(very_thick_films),
      cmocka_unit_test(almost_no_film),
      cmocka_unit_test(refusals),
      cmocka_unit_test(every_allocation_fails_once),
  };
  return cmocka_run_group_tests(tests, set_up, tear_down);
}
