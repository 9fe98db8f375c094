/* Mode fields: a slab in closed form, power, symmetry and stop bands. */
#include "study/fields.h"

#include "unit/short_memory.h"
#include "unit/study/understood.h"

static const double PI = 3.141592653589793238;

/* A tooth as long as the pitch is a slab, 0.45 µm wide. */
#define MATERIALS                                                                          \
  "format: 1\n"                                                                            \
  "materials: {core: {constant: {index: 2.8}}, oxide: {constant: {index: 1.444}}, lossy: " \
  "{constant: {index: 2.8, extinction: 0.01}}}\n"                                          \
  "light: {wavelength_nm: 1550}\n"
static const char SLAB[] = MATERIALS
    "cell: {pitch_nm: 300, cladding: oxide, shapes: [{rect: {fill: core, length_nm: 300, "
    "width_nm: 450}}]}\n";
static const char ROW[] = MATERIALS
    "cell: {pitch_nm: 300, cladding: oxide, shapes: [{rect: {fill: core, length_nm: 150, "
    "width_nm: 450}}]}\n";
static const char LOSSY[] = MATERIALS
    "cell: {pitch_nm: 300, cladding: oxide, shapes: [{rect: {fill: lossy, length_nm: 150, "
    "width_nm: 450}}]}\n";
static const char STACK[] = MATERIALS
    "cell: {pitch_nm: 200, cladding: oxide, lateral: uniform, shapes: [{stripe: {fill: core, "
    "across: z, from_nm: -50, to_nm: 50}}]}\n";

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

static picket_field *field_of(const char *text, pk_polarization polarization, double wavelength,
                              int order, double accuracy) {
  picket_options options;
  picket_options_init(&options);
  options.accuracy = accuracy;
  understood u = understand_good(context, text);
  picket_field *field = NULL;
  if (pk_mode_field(u.problem, polarization, wavelength, &options, order, &field) != PICKET_OK) {
    fail_msg("%s", picket_context_message(context));
  }
  picket_problem_free(u.owner);
  return field;
}

/* ½ Re ∫ (E × H*)_z dx on a line, W per metre, by the trapezoidal rule; (E × H*)_z = E_x H_y* - E_y
 * H_x*. The decay of the wave is put back. */
static double power_on(const picket_field *f, int iz) {
  bool ey = f->about.polarization == PICKET_EY;
  double sum = 0, fade = exp(-2 * 2 * PI / f->about.wavelength_um * f->about.index_im * f->z[iz]);
  for (int j = 0; j < f->nx; j++) {
    int64_t p = (int64_t)iz * f->nx + j;
    double low = f->x[j > 0 ? j - 1 : 0], high = f->x[j + 1 < f->nx ? j + 1 : j];
    double width = f->nx > 1 ? 0.5e-6 * (high - low) : 1;
    double complex density = ey ? -f->y[p] * conj(f->across[p]) : f->across[p] * conj(f->y[p]);
    sum += 0.5 * creal(density) * width;
  }
  return fade * sum;
}

static double mean_power(const picket_field *f) {
  double sum = 0;
  for (int i = 0; i + 1 < f->nz; i++) {
    sum += 0.5 * (f->z[i + 1] - f->z[i]) * (power_on(f, i) + power_on(f, i + 1));
  }
  return sum / f->about.pitch_um;
}

/* The fundamental mode of the slab: cos(qx) inside, exp(-γ|x|) outside, q tan(qw/2) = s γ with s =
 * 1 for E_y (TE) and ε_core/ε_cladding for H_y (TM). Solved by bisection. */
typedef struct slab_mode {
  double half, q, gamma, index;
} slab_mode;

static slab_mode slab_of(double wavelength, double ratio) {
  double k0 = 2 * PI / wavelength, half = 0.225;
  double reach = k0 * sqrt(2.8 * 2.8 - 1.444 * 1.444);
  double low = 0, high = fmin(reach, 0.5 * PI / half);
  for (int i = 0; i < 100; i++) {
    double q = 0.5 * (low + high);
    *(q * tan(q * half) < ratio * sqrt(reach * reach - q * q) ? &low : &high) = q;
  }
  return (slab_mode){half, low, sqrt(reach * reach - low * low),
                     sqrt(2.8 * 2.8 - low * low / (k0 * k0))};
}

static double shape_of(const slab_mode *m, double x) {
  double a = fabs(x);
  return a < m->half ? cos(m->q * a) : cos(m->q * m->half) * exp(-m->gamma * (a - m->half));
}

/* Largest misfit of the profile on any line, of a peak of 1. */
static double misfit(const picket_field *f, const slab_mode *m) {
  double worst = 0;
  double complex peak = 0;
  for (int64_t i = 0; i < (int64_t)f->nz * f->nx; i++) {
    peak = creal(f->y[i]) > creal(peak) ? f->y[i] : peak;
  }
  for (int64_t i = 0; i < (int64_t)f->nz * f->nx; i++) {
    worst = fmax(worst, cabs(f->y[i] / peak - shape_of(m, f->x[i % f->nx])));
  }
  return worst;
}

/* Second order: four times as many lines, a sixteenth of the error. The wall of an open side leaves
 * exp(-2 × its distance in decay lengths) = accuracy/10 of the power, and its root of the field
 * near it, so the profile is compared to that. */
static void a_slab_has_its_profile(void **state) {
  (void)state;
  for (int p = 0; p < 2; p++) {
    slab_mode m = slab_of(1.55, p == PK_EY ? 1 : 2.8 * 2.8 / (1.444 * 1.444));
    picket_field *coarse = field_of(SLAB, (pk_polarization)p, 1.55, 0, 1e-3);
    picket_field *fine = field_of(SLAB, (pk_polarization)p, 1.55, 0, 1e-7);
    assert_near(fine->about.index_re, m.index, 1e-3);
    assert_near(fine->about.index_im, 0, 1e-9);
    assert_true(misfit(coarse, &m) < 0.01);
    assert_true(misfit(fine, &m) < 1e-3);
    assert_true(fabs(mean_power(fine) - 1) < fabs(mean_power(coarse) - 1) / 8);
    pk_mode_field_free(coarse);
    pk_mode_field_free(fine);
  }
}

/* E over H of the slab in closed form: H_x = -n E_y/Z0; H_z = -(i/ωμ0) ∂x E_y; E_x = n Z0 H_y/ε. A
 * difference over a spacing h misses the derivative by (kh)²/24, 1e-4 along z. */
static void a_slab_has_its_impedance(void **state) {
  (void)state;
  const double z0 = 376.730313668;
  picket_field *ey = field_of(SLAB, PK_EY, 1.55, 0, 1e-7),
               *hy = field_of(SLAB, PK_HY, 1.55, 0, 1e-7);
  slab_mode m = slab_of(1.55, 1);
  double k0 = 2 * PI / 1.55;
  for (int64_t i = 0; i < (int64_t)ey->nz * ey->nx; i++) {
    double x = ey->x[i % ey->nx];
    if (fabs(fabs(x) - m.half) < 0.03 || fabs(x) > 0.6) {
      continue; /* interface nodes average both sides; farther out walls and rounding are felt */
    }
    double complex e = ey->y[i];
    double slope = fabs(x) < m.half ? -m.q * tan(m.q * x) : -copysign(m.gamma, x);
    assert_near(cabs(ey->across[i] + ey->about.index_re * e / z0), 0,
                1e-4 * cabs(ey->about.index_re * e / z0));
    assert_near(cabs(ey->along[i] + I / (k0 * z0) * slope * e), 0, 1e-3 * cabs(e) / z0);
    double complex expected = hy->about.index_re * z0 * hy->y[i] / hy->permittivity[i];
    assert_near(cabs(hy->across[i] - expected), 0, 1e-4 * cabs(expected));
  }
  pk_mode_field_free(ey);
  pk_mode_field_free(hy);
}

/* Unit power, of lossless and lossy rows and per area of a stack. The trapezoidal rule over nodes
 * is second order; at a corner E is as r^(α - 1), which costs the row in hy most. */
static void modes_carry_unit_power(void **state) {
  (void)state;
  static const char *const texts[] = {ROW, LOSSY, STACK};
  for (int t = 0; t < 3; t++) {
    for (int p = 0; p < 2; p++) {
      picket_field *coarse = field_of(texts[t], (pk_polarization)p, 1.7, 0, 1e-3);
      picket_field *fine = field_of(texts[t], (pk_polarization)p, 1.7, 0, 1e-5);
      assert_true(coarse->about.propagates && fine->about.propagates);
      assert_true((fine->about.index_im > 1e-4) == (t == 1));
      assert_near(mean_power(coarse), 1, 2e-2);
      assert_near(mean_power(fine), 1, 1e-3);
      assert_true(fabs(mean_power(fine) - 1) < 0.25 * fabs(mean_power(coarse) - 1));
      pk_mode_field_free(coarse);
      pk_mode_field_free(fine);
    }
  }
}

/* The row is its own mirror image in x = 0: the unknown of order m has parity (-1)^m, and so has
 * the component across z; the one along z has the other. Rounding of a solve: 1e-9. */
static void modes_have_parity(void **state) {
  (void)state;
  for (int order = 0; order < 2; order++) {
    picket_field *f = field_of(ROW, PK_EY, 1.3, order, 1e-3);
    double sign = order % 2 ? -1 : 1, largest = 0;
    for (int64_t i = 0; i < (int64_t)f->nz * f->nx; i++) {
      largest = fmax(largest, cabs(f->y[i]));
    }
    assert_int_equal(f->about.order, order);
    for (int64_t i = 0; i < (int64_t)f->nz * f->nx; i++) {
      int64_t mirrored = i - i % f->nx + f->nx - 1 - i % f->nx;
      assert_near(f->x[i % f->nx], -f->x[mirrored % f->nx], 1e-12);
      assert_near(cabs(f->y[i] - sign * f->y[mirrored]) / largest, 0, 1e-7);
      assert_near(cabs(f->across[i] - sign * f->across[mirrored]) * 377 / largest, 0, 1e-6);
      assert_near(cabs(f->along[i] + sign * f->along[mirrored]) * 377 / largest, 0, 1e-6);
    }
    pk_mode_field_free(f);
  }
}

/* The last line along z repeats the first, and the phase is that of the largest value. */
static void the_periodic_part_is_periodic(void **state) {
  (void)state;
  picket_field *f = field_of(ROW, PK_HY, 1.55, 0, 1e-3);
  const double complex *arrays[] = {f->y, f->along, f->across, f->permittivity};
  double largest = 0, real = 0;
  for (int a = 0; a < 4; a++) {
    for (int j = 0; j < f->nx; j++) {
      assert_true(arrays[a][j] == arrays[a][(int64_t)(f->nz - 1) * f->nx + j]);
    }
  }
  for (int64_t i = 0; i < (int64_t)f->nz * f->nx; i++) {
    largest = fmax(largest, cabs(f->y[i]));
    real = fmax(real, creal(f->y[i]));
  }
  assert_near(real / largest, 1, 1e-6);
  assert_near(f->z[0], -0.15, 1e-12);
  assert_near(f->z[f->nz - 1], 0.15, 1e-12);
  pk_mode_field_free(f);
}

/* The middle of the first stop band of the stack: edges at pitch/λ = 0.155... and 0.242... for
 * index 3.476; here 2.8, whose Bragg wavelength is 2 × 0.2 × (2.8 + 1.444)/2 = 0.849 µm. */
static void a_stop_band_has_a_largest_value_of_one(void **state) {
  (void)state;
  for (int p = 0; p < 2; p++) {
    picket_field *f = field_of(STACK, (pk_polarization)p, 0.87, 0, 1e-4);
    double largest = 0;
    assert_false(f->about.propagates);
    assert_true(f->about.index_im > 0.01);
    assert_near(f->about.index_re, 0.87 / 0.4, 1e-9);
    const double complex *arrays[] = {f->y, f->along, f->across};
    for (int a = 0; a < 3; a++) {
      for (int64_t i = 0; i < (int64_t)f->nz * f->nx; i++) {
        largest = fmax(largest, cabs(arrays[a][i]));
      }
    }
    assert_near(largest, 1, 1e-12);
    /* Of ½ |E||H| = 4e-3 W/m², what the trapezoidal rule leaves: second order, 96 steps. */
    assert_near(mean_power(f), 0, 2e-6);
    pk_mode_field_free(f);
  }
}

static void what_is_not_there_is_refused(void **state) {
  (void)state;
  picket_options options;
  picket_options_init(&options);
  picket_field *field = NULL;
  understood u = understand_good(context, ROW);
  assert_int_equal(pk_mode_field(u.problem, PK_EY, 1.55, &options, 7, &field),
                   PICKET_ERROR_NO_MODE);
  assert_non_null(strstr(picket_context_message(context), "order 7 at 1550 nm"));
  picket_problem_free(u.owner);
  u = understand_good(context, "format: 1\nmaterials: {m: {constant: {index: 2}}}\n");
  assert_int_equal(pk_mode_field(u.problem, PK_EY, 1.55, &options, 0, &field), PICKET_ERROR_INPUT);
  assert_non_null(strstr(picket_context_message(context), "cell"));
  picket_problem_free(u.owner);
  assert_null(field);
}

/* What a sweep tells its sink. */
typedef struct tally {
  int taken, missed;
  picket_status answer;
} tally;

static picket_status take(void *user, const picket_field *field) {
  tally *t = user;
  assert_non_null(field);
  t->taken++;
  return t->answer;
}

static picket_status miss(void *user, pk_polarization polarization, double wavelength_um,
                          const char *why) {
  tally *t = user;
  (void)polarization;
  assert_near(wavelength_um, 0.2, 1e-12);
  assert_non_null(strstr(why, "200"));
  t->missed++;
  return PICKET_OK;
}

static picket_status swept(const char *set, tally *t) {
  picket_options options;
  picket_options_init(&options);
  options.accuracy = 1e-2;
  picket_problem *problem = NULL;
  const pk_problem *known = NULL;
  assert_int_equal(picket_problem_read_text(context, STACK, strlen(STACK), "test", &problem),
                   PICKET_OK);
  assert_int_equal(picket_problem_set(problem, "materials.core", "{catalogue: silicon}"),
                   PICKET_OK);
  assert_int_equal(picket_problem_set(problem, "light", set), PICKET_OK);
  assert_int_equal(pk_problem_understand(problem, &known), PICKET_OK);
  pk_field_sink sink = {take, miss, t};
  picket_status status = pk_study_fields(known, &options, &sink);
  picket_problem_free(problem);
  return status;
}

/* Silicon is not known at 200 nm. */
static void a_point_without_fields_stops_nothing(void **state) {
  (void)state;
  tally t = {0, 0, PICKET_OK};
  assert_int_equal(swept("{wavelength_nm: [200, 1550, 1600], polarization: hy}", &t), PICKET_OK);
  assert_int_equal(t.taken, 2);
  assert_int_equal(t.missed, 1);
  t = (tally){0, 0, PICKET_OK};
  assert_int_equal(swept("{wavelength_nm: 200}", &t), PICKET_ERROR_RANGE);
  assert_int_equal(t.missed, 2);
  assert_true(strlen(picket_context_message(context)) > 0);
  t = (tally){0, 0, PICKET_ERROR_OUTPUT};
  assert_int_equal(swept("{wavelength_nm: [1550, 1600]}", &t), PICKET_ERROR_OUTPUT);
  assert_int_equal(t.taken, 1);
  assert_int_equal(swept("{polarization: ey}", &t), PICKET_ERROR_INPUT);
}

static void every_allocation_may_fail(void **state) {
  (void)state;
  picket_options options;
  picket_options_init(&options);
  options.accuracy = 1e-2;
  for (long n = 1;; n++) {
    short_memory memory = {0};
    picket_context *c = short_memory_context(&memory);
    understood u = understand_good(c, STACK);
    picket_field *field = NULL;
    memory.fail_at = memory.asked + n;
    picket_status status = pk_mode_field(u.problem, PK_HY, 1.55, &options, 0, &field);
    if (status != PICKET_OK) {
      assert_int_equal(status, PICKET_ERROR_MEMORY);
      assert_null(field);
    }
    pk_mode_field_free(field);
    picket_problem_free(u.owner);
    picket_context_free(c);
    assert_int_equal(memory.living, 0);
    if (status == PICKET_OK) {
      assert_true(n > 20);
      return;
    }
  }
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(a_slab_has_its_profile),
      cmocka_unit_test(a_slab_has_its_impedance),
      cmocka_unit_test(modes_carry_unit_power),
      cmocka_unit_test(modes_have_parity),
      cmocka_unit_test(the_periodic_part_is_periodic),
      cmocka_unit_test(a_stop_band_has_a_largest_value_of_one),
      cmocka_unit_test(what_is_not_there_is_refused),
      cmocka_unit_test(a_point_without_fields_stops_nothing),
      cmocka_unit_test(every_allocation_may_fail),
  };
  return cmocka_run_group_tests(tests, set_up, tear_down);
}
