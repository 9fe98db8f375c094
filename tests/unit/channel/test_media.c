/* Channels of dispersive materials: the frequency found is the one of its media, and the slope of
 * the band has the dispersion in it. */
#include "channel/media.h"

#include "unit/channel/guide.h"

static const double PITCH = 0.36;

typedef struct dispersive {
  guide guide;
  pk_materials *materials;
  pk_channel *channel;
  pk_channel_media media;
} dispersive;

static dispersive open_dispersive(void) {
  static const double B[] = {8.5}, C[] = {0.25};
  const double complex index[PLANE_MEDIA] = {1.4, 3, 1};
  dispersive d = {.guide = guide_of_teeth(index, PITCH, 0.18, PK_END_ZERO, PK_END_FREE, 0.8)};
  picket_context *context = d.guide.plane[0].context;
  assert_int_equal(pk_materials_create(context, &d.materials), PICKET_OK);
  assert_int_equal(pk_materials_add_constant(d.materials, nowhere, "a", 1.4, 0, 0), PICKET_OK);
  assert_int_equal(pk_materials_add_sellmeier(d.materials, nowhere, "s", 1, B, C), PICKET_OK);
  assert_int_equal(pk_materials_add_constant(d.materials, nowhere, "b", 2, 0, 0), PICKET_OK);
  d.channel = guide_channel(&d.guide, 1, -3, 2);
  assert_int_equal(pk_channel_media_open(context, d.materials, 20, d.channel, &d.media), PICKET_OK);
  return d;
}

static void close_dispersive(dispersive *d) {
  pk_channel_media_close(&d->media);
  pk_channel_free(d->channel);
  pk_materials_free(d->materials);
  guide_close(&d->guide);
}

static double k0_near(dispersive *d, double k, pk_channel_mode *mode) {
  bool known = false;
  assert_int_equal(pk_channel_mode_near_k0(d->channel, &d->media, k, k / 1.6, NULL, mode, &known),
                   PICKET_OK);
  assert_true(known);
  return sqrt(creal(mode->k0_square));
}

static void the_frequency_is_the_one_of_its_media(void **state) {
  (void)state;
  dispersive d = open_dispersive();
  const double k = 0.65 * PI / PITCH;
  pk_channel_mode mode = {0};
  double k0 = k0_near(&d, k, &mode);
  assert_true(d.media.dispersive && d.media.used[1] && !d.media.used[2]);
  assert_int_equal(pk_channel_media_set(&d.media, k0, d.channel), PICKET_OK);
  pk_channel_mode again = guide_mode_at_k(d.channel, k, k0);
  assert_near(sqrt(creal(again.k0_square)) / k0, 1, 1e-12);
  pk_channel_mode wave = guide_wave(d.channel, k0, 1.01 * k);
  assert_near(creal(wave.k) / k, 1, 1e-10);
  pk_channel_modes_clear(d.guide.plane[0].context, 1, &wave);
  pk_channel_modes_clear(d.guide.plane[0].context, 1, &again);
  pk_channel_modes_clear(d.guide.plane[0].context, 1, &mode);
  close_dispersive(&d);
}

/* dk0/dk from forms against modes at four neighbouring k. */
static void slopes_hold_the_dispersion(void **state) {
  (void)state;
  dispersive d = open_dispersive();
  const double k = 0.65 * PI / PITCH, step = 0.02;
  static const double AT[4] = {-2, -1, 1, 2}, WEIGHT[4] = {1, -8, 8, -1};
  double known = 0;
  picket_context *context = d.guide.plane[0].context;
  for (int i = 0; i < 4; i++) {
    pk_channel_mode mode = {0};
    known += WEIGHT[i] * k0_near(&d, k + AT[i] * step, &mode) / (12 * step);
    pk_channel_modes_clear(context, 1, &mode);
  }
  pk_channel_mode mode = {0};
  double k0 = k0_near(&d, k, &mode);
  double complex with, without;
  assert_int_equal(pk_channel_k0_form(d.channel, k0, d.media.slope, mode.left, mode.right, &with),
                   PICKET_OK);
  assert_int_equal(pk_channel_k0_form(d.channel, k0, NULL, mode.left, mode.right, &without),
                   PICKET_OK);
  double complex by_k = pk_channel_k_form(d.channel, k, mode.left, mode.right);
  assert_near(creal(-by_k / with) / known, 1, 1e-6);
  assert_true(creal(-by_k / without) / known > 1.003); /* dispersion makes it slower */
  pk_channel_modes_clear(context, 1, &mode);
  close_dispersive(&d);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(the_frequency_is_the_one_of_its_media),
      cmocka_unit_test(slopes_hold_the_dispersion),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
