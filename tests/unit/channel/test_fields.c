/* Fields of Bloch modes at points of z. */
#include "channel/fields.h"

#include "section/fields.h"
#include "unit/channel/guide.h"

static const double PITCH = 0.3;
static const double complex SILICON[PLANE_MEDIA] = {1.4440, 3.4757, 1};

static void same_up_to(double complex factor, int count, const double complex *a,
                       const double complex *b, double tolerance) {
  double size = 0, wrong = 0;
  for (int i = 0; i < count; i++) {
    size = fmax(size, cabs(b[i]));
    wrong = fmax(wrong, cabs(a[i] - factor * b[i]));
  }
  assert_near(wrong, 0, tolerance * cabs(factor) * size);
}

/* A channel of one slice has the fields of its section, all six with one factor, times exp(iβz);
 * vectors are good to about 1e-10. */
static void one_slice_has_the_fields_of_the_section(void **state) {
  (void)state;
  const double k0 = 2 * PI / 1.55, z = 0.07;
  guide g = guide_of_teeth(SILICON, PITCH, PITCH, PK_END_ZERO, PK_END_FREE, 0.8);
  pk_section *section = plane_section(&g.plane[0], 2, true);
  pk_section_mode mode;
  pk_section_fields known = {0};
  int found = 0;
  assert_int_equal(pk_section_modes(section, k0, 12.1 * k0 * k0, 1, &mode, &found), PICKET_OK);
  assert_int_equal(pk_section_fields_take(section, k0, &mode, &known), PICKET_OK);
  pk_channel *channel = guide_channel(&g, 2, -1, 0);
  pk_channel_mode wave = guide_wave(channel, k0, creal(mode.beta) * 1.001);
  pk_channel_fields f = {0};
  assert_int_equal(pk_channel_fields_create(channel, &f), PICKET_OK);
  pk_channel_fields_at(channel, wave.k, k0, wave.right, 0, &f);
  int strongest = 0;
  for (int i = 0; i < f.mx * f.ny; i++) {
    strongest = cabs(known.ex[i]) > cabs(known.ex[strongest]) ? i : strongest;
  }
  double complex factor = f.ex[strongest] / known.ex[strongest];
  for (int place = 0; place < 2; place++) {
    same_up_to(factor, f.mx * f.ny, f.ex, known.ex, 1e-8);
    same_up_to(factor, f.nx * f.my, f.ey, known.ey, 1e-8);
    same_up_to(factor, f.nx * f.ny, f.ez, known.ez, 1e-8);
    same_up_to(factor, f.nx * f.my, f.hx, known.hx, 1e-8);
    same_up_to(factor, f.mx * f.ny, f.hy, known.hy, 1e-8);
    same_up_to(factor, f.mx * f.my, f.hz, known.hz, 1e-8);
    pk_channel_fields_at(channel, wave.k, k0, wave.right, z, &f);
    factor *= cexp(I * mode.beta * z);
  }
  assert_near(pk_channel_line_at(channel, PK_V, 1), pk_section_line_at(section, PK_V, 1), 0);
  assert_near(pk_channel_middle_at(channel, PK_U, 2), pk_section_middle_at(section, PK_U, 2), 0);
  pk_channel_fields_clear(&f);
  pk_section_fields_clear(&known);
  pk_channel_modes_clear(g.plane[0].context, 1, &wave);
  pk_section_modes_clear(g.plane[0].context, 1, &mode);
  pk_channel_free(channel);
  pk_section_free(section);
  guide_close(&g);
}

/* A pitch on, the fields have turned by exp(ikΛ); E_z jumps at the wall of a tooth by the ratio of
 * the permittivities there, E_x and h do not. */
static void teeth_have_bloch_fields(void **state) {
  (void)state;
  guide g = guide_of_teeth(SILICON, PITCH, 0.15, PK_END_ZERO, PK_END_FREE, 0.8);
  pk_channel *channel = guide_channel(&g, 1, -4, 3);
  const double k = 0.7 * PI / PITCH;
  pk_channel_mode mode = guide_mode_at_k(channel, k, k / 1.68);
  double k0 = sqrt(creal(mode.k0_square));
  pk_channel_fields a = {0}, b = {0};
  assert_int_equal(pk_channel_fields_create(channel, &a), PICKET_OK);
  assert_int_equal(pk_channel_fields_create(channel, &b), PICKET_OK);
  pk_channel_fields_at(channel, k, k0, mode.right, 0.03, &a);
  pk_channel_fields_at(channel, k, k0, mode.right, 0.03 + PITCH, &b);
  double complex turn = cexp(I * k * PITCH);
  same_up_to(turn, a.mx * a.ny, b.ex, a.ex, 1e-12);
  same_up_to(turn, a.nx * a.ny, b.ez, a.ez, 1e-12);
  same_up_to(turn, a.mx * a.my, b.hz, a.hz, 1e-12);
  const double near = 1e-9;
  pk_channel_fields_at(channel, k, k0, mode.right, 0.075 - near, &a);
  pk_channel_fields_at(channel, k, k0, mode.right, 0.075 + near, &b);
  same_up_to(1, a.mx * a.ny, b.ex, a.ex, 1e-6);
  same_up_to(1, a.mx * a.ny, b.hy, a.hy, 1e-6);
  int inside = 1 * a.ny + 0; /* x above the plane, y on it: within the core */
  double ratio = creal(SILICON[1] * SILICON[1] / (SILICON[0] * SILICON[0]));
  assert_near(creal(b.ez[inside] / a.ez[inside]), ratio, 1e-6 * ratio);
  pk_channel_fields_clear(&a);
  pk_channel_fields_clear(&b);
  pk_channel_modes_clear(g.plane[0].context, 1, &mode);
  pk_channel_free(channel);
  guide_close(&g);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(one_slice_has_the_fields_of_the_section),
      cmocka_unit_test(teeth_have_bloch_fields),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
