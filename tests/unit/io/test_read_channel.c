/* channel: planes across a guide, slice by slice along z. */
#include "reading.h"
#include "unit/near.h"
#include "unit/short_memory.h"

#define CHANNEL(rest) MATERIALS "channel: {pitch_nm: 300, cladding: oxide, " rest "}\n"
#define TOOTH(along) "{rect: {fill: si, width_nm: 450, height_nm: 220, along_nm: " along "}}"
#define ONE(along) CHANNEL("shapes: [" TOOTH(along) "]")

static const bad_text bad_channel[] = {
    REFUSED("3:10", "channel has no \"pitch_nm\"",
            MATERIALS "channel: {cladding: oxide, shapes: [" TOOTH("[0, 1]") "]}\n"),
    REFUSED("3:10", "channel has no \"shapes\"",
            MATERIALS "channel: {pitch_nm: 300, cladding: oxide}\n"),
    REFUSED("3:10", "channel has no \"cladding\"",
            MATERIALS "channel: {pitch_nm: 300, shapes: []}\n"),
    REFUSED("3:21", "channel.pitch_nm is 0, must be above 0",
            MATERIALS "channel: {pitch_nm: 0, cladding: oxide, shapes: []}\n"),
    REFUSED("3:21", "channel.pitch_nm is \".nan\"",
            MATERIALS "channel: {pitch_nm: .nan, cladding: oxide, shapes: []}\n"),
    REFUSED("3:53", "channel.symmetry is \"on\", must be one of: auto, none",
            CHANNEL("symmetry: on, shapes: []")),
    REFUSED("3:51", "channel.shapes has 0 elements", CHANNEL("shapes: []")),
    REFUSED("3:116", "channel.shapes.0.rect.along_nm.1 is 10, must be above the start of the range",
            ONE("[10, 10]")),
    REFUSED("3:116", "must be above the start of the range, 75", ONE("[75, -75]")),
    REFUSED("3:111", "channel.shapes.0.rect.along_nm is 301 nm long, must be at most the pitch",
            ONE("[-150, 151]")),
    REFUSED("3:111", "lies wholly outside the pitch, which is from -150 to 150 nm",
            ONE("[150, 160]")),
    REFUSED("3:111", "lies wholly outside", ONE("[-160, -150]")),
    REFUSED("3:111", "channel.shapes.0.rect.along_nm has 1 element", ONE("[1]")),
    REFUSED("3:112", "channel.shapes.0.rect.along_nm.0 is -.inf, must be at least",
            ONE("[-.inf, 0]")),
    REFUSED("3:60", "unknown key \"length_nm\"", CHANNEL("shapes: [{rect: {length_nm: 1}}]")),
    REFUSED("3:10", "channel holds stripes only",
            CHANNEL("shapes: [{stripe: {fill: si, across: y, from_nm: 0, to_nm: 1, along_nm: [0, "
                    "1]}}]")),
    REFUSED("3:80", "must be one of: x, y",
            CHANNEL("shapes: [{stripe: {fill: si, across: z, from_nm: 0, to_nm: 1}}]")),
};

static void refuses_bad_channels(void **state) {
  (void)state;
  CHECK_ALL_REFUSED(bad_channel);
}

/* Sections and cells have no range along z. */
static void keeps_the_range_to_channels(void **state) {
  (void)state;
  static const bad_text rows[] = {
      REFUSED("3:86", "unknown key \"along_nm\"",
              MATERIALS "section: {cladding: oxide, shapes: [" TOOTH("[0, 1]") "]}\n"),
  };
  CHECK_ALL_REFUSED(rows);
}

static void check_medium(const pk_channel_block *c, int slice, double x, double y, int medium) {
  assert_int_equal(pk_geometry_medium_at(c->slice[slice], x, y), medium);
}

static void cuts_the_pitch_into_slices(void **state) {
  (void)state;
  picket_context *context = plain_context();
  pk_document *document = NULL;
  pk_problem *p = sound(context,
                        CHANNEL("symmetry: none, span_nm: [3000, 2000], shapes: ["
                                "{stripe: {fill: si, across: y, from_nm: -.inf, to_nm: -500}}, "
                                "{rect: {fill: si, width_nm: 450, height_nm: 220, along_nm: [-75, "
                                "75]}}, "
                                "{disc: {fill: oxide, diameter_nm: 100, along_nm: [50, 225]}}, "
                                "{disc: {fill: si, diameter_nm: 40, along_nm: [-150, 150]}}]"),
                        &document);
  const pk_channel_block *c = &p->channel;
  assert_true(c->given && !c->use_planes);
  assert_near(c->pitch_um, 0.3, 1e-15);
  /* -75 (also of the wrapped 225), 50 and 75. */
  assert_int_equal(c->slices, 3);
  assert_near(c->from_um[0], -0.075, 1e-15);
  assert_near(c->from_um[1], 0.05, 1e-15);
  assert_near(c->from_um[2], 0.075, 1e-15);
  for (int i = 0; i < 3; i++) {
    check_medium(c, i, 0, -0.6, 1);
    check_medium(c, i, 0.01, 0.01, 1);
  }
  /* The later disc covers the tooth where both are, and nowhere else. */
  check_medium(c, 0, 0.03, 0.03, 1);
  check_medium(c, 1, 0.03, 0.03, 0);
  check_medium(c, 2, 0.03, 0.03, 0);
  check_medium(c, 0, 0.2, 0.1, 1);
  check_medium(c, 1, 0.2, 0.1, 1);
  check_medium(c, 2, 0.2, 0.1, 0);
  assert_int_equal(c->outline.others, 2);
  assert_near(c->outline.span_um[1], 2, 1e-15);
  assert_near(c->outline.low_um[0], -0.225, 1e-15);
  assert_near(c->outline.high_um[1], 0.11, 1e-15);
  pk_problem_free(p);
  pk_document_free(document);
  picket_context_free(context);
}

/* A range that lies across the border of the pitch is the same as its two parts. */
static void wraps_ranges(void **state) {
  (void)state;
  picket_context *context = plain_context();
  pk_document *document = NULL;
  pk_problem *p = sound(context, ONE("[100, 200]"), &document);
  const pk_channel_block *c = &p->channel;
  assert_int_equal(c->slices, 2);
  assert_near(c->from_um[0], -0.1, 1e-15);
  assert_near(c->from_um[1], 0.1, 1e-15);
  check_medium(c, 0, 0, 0, 0);
  check_medium(c, 1, 0, 0, 1);
  pk_problem_free(p);
  pk_document_free(document);
  picket_context_free(context);
}

/* The whole pitch, said or not, wherever it begins, is one slice; so is a tooth that fills it. */
static void knows_uniform_channels(void **state) {
  (void)state;
  static const char *const texts[] = {
      ONE("[-150, 150]"), ONE("[-20, 280]"),
      CHANNEL("shapes: [{rect: {fill: si, width_nm: 450, height_nm: 220}}]")};
  for (size_t i = 0; i < sizeof texts / sizeof *texts; i++) {
    picket_context *context = plain_context();
    pk_document *document = NULL;
    pk_problem *p = sound(context, texts[i], &document);
    assert_true(p->channel.use_planes);
    assert_int_equal(p->channel.slices, 1);
    check_medium(&p->channel, 0, 0, 0, 1);
    pk_problem_free(p);
    pk_document_free(document);
    picket_context_free(context);
  }
}

/* Hundreds of cuts are a mistake, or need another tool. */
static void limits_the_slices(void **state) {
  (void)state;
  static char text[60000];
  size_t length = (size_t)snprintf(
      text, sizeof text, MATERIALS "channel:\n  pitch_nm: 300\n  cladding: oxide\n  shapes:\n");
  for (int i = 0; i < 120; i++) {
    length += (size_t)snprintf(text + length, sizeof text - length,
                               "    - disc: {fill: si, diameter_nm: 100, along_nm: [%d, %d]}\n",
                               i - 100, i - 99);
  }
  picket_context *context = plain_context();
  assert_int_equal(understand(context, text, length), PICKET_ERROR_INPUT);
  assert_non_null(strstr(picket_context_message(context), "more than 100 slices"));
  picket_context_free(context);
}

/* Every allocation fails once: the failure is reported and nothing is left behind. */
static void survives_short_memory(void **state) {
  (void)state;
  static const char text[] = CHANNEL("shapes: [" TOOTH(
      "[-75, 75]") ", {polygon: {fill: si, corners_nm: [[0, 0], [9, 0], "
                   "[0, 9]], along_nm: [100, 200]}}]");
  picket_status status = PICKET_ERROR_MEMORY;
  long n = 1;
  for (; status != PICKET_OK; n++) {
    short_memory memory = {0, n, 0};
    picket_context *context = short_memory_context(&memory);
    if (context) {
      status = understand(context, text, sizeof text - 1);
      assert_true(status == PICKET_OK || status == PICKET_ERROR_MEMORY);
      picket_context_free(context);
    }
    assert_int_equal(memory.living, 0);
  }
  assert_true(n > 50);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(refuses_bad_channels),       cmocka_unit_test(keeps_the_range_to_channels),
      cmocka_unit_test(cuts_the_pitch_into_slices), cmocka_unit_test(wraps_ranges),
      cmocka_unit_test(knows_uniform_channels),     cmocka_unit_test(limits_the_slices),
      cmocka_unit_test(survives_short_memory),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
