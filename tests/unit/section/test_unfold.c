/* A quarter of a plane, unfolded, is the mode of the whole plane. */
#include "section/unfold.h"

#include "unit/section/plane.h"
#include "unit/short_memory.h"

static const double complex INDICES[PLANE_MEDIA] = {1.444, 3.4757, 1};
static const double K0 = 2 * 3.141592653589793238 / 1.55;

/* Two modes of the widest family are guided, so that every family has one. */
static plane wire(picket_context *context, pk_end x, pk_end y) {
  plane p = plane_in(context, INDICES, 0);
  plane_rect(&p, 1, 0, 0, 0.8, 0.5);
  lay_ruler(context, &(ruler){x, PK_END_ZERO, 0, 1.3, 0.4, 0.1, 0.2, 1, {0.4}}, &p.x);
  lay_ruler(context, &(ruler){y, PK_END_ZERO, 0, 1.1, 0.25, 0.08, 0.2, 1, {0.25}}, &p.y);
  return p;
}

/* The axis from 0 to an end becomes one from -end to end. */
static void double_axis(picket_context *context, pk_axis *axis) {
  int n = axis->intervals;
  pk_axis both = {.low = axis->high, .high = axis->high, .intervals = 2 * n};
  both.line = PK_NEW(context, 2 * n + 1, double);
  both.length = PK_NEW(context, 2 * n, double complex);
  assert_true(both.line && both.length);
  for (int i = 0; i <= n; i++) {
    both.line[n + i] = axis->line[i];
    both.line[n - i] = -axis->line[i];
  }
  for (int i = 0; i < n; i++) {
    both.length[n + i] = both.length[n - 1 - i] = axis->length[i];
  }
  pk_axis_clear(context, axis);
  *axis = both;
}

static void take_whole(const plane *p, const pk_section *section, const pk_section_mode *mode,
                       bool mirrored, pk_section_whole *out) {
  (void)p;
  pk_section_fields fields;
  assert_int_equal(pk_section_fields_take(section, K0, mode, &fields), PICKET_OK);
  assert_int_equal(pk_section_unfold(section, &fields, (bool[2]){mirrored, mirrored}, out),
                   PICKET_OK);
  pk_section_fields_clear(&fields);
}

static double complex inner(const pk_section_whole *a, const pk_section_whole *b) {
  double complex sum = 0;
  for (int c = 0; c < PK_WHOLE_NAMES; c++) {
    int count = pk_whole_count(a, c, PK_U) * pk_whole_count(a, c, PK_V);
    for (int i = 0; i < count; i++) {
      sum += conj(a->field[c][i]) * b->field[c][i];
    }
  }
  return sum;
}

static void places_agree(const pk_section_whole *a, const pk_section_whole *b) {
  for (int axis = 0; axis < 2; axis++) {
    assert_int_equal(a->lines[axis], b->lines[axis]);
    for (int i = 0; i < a->lines[axis]; i++) {
      assert_near(a->line[axis][i], b->line[axis][i], 1e-14);
    }
    for (int i = 0; i + 1 < a->lines[axis]; i++) {
      assert_near(a->middle[axis][i], b->middle[axis][i], 1e-14);
    }
  }
}

/* Both grids carry the same equations, so that all components agree to what an iteration with
 * residuals below 1e-9 leaves. */
static void a_quarter_unfolds_to_the_whole(void **state) {
  (void)state;
  enum { MODES = 8 };
  static const pk_end ends[2] = {PK_END_ZERO, PK_END_FREE};
  for (int family = 0; family < 4; family++) {
    picket_context *context = NULL;
    assert_int_equal(picket_context_create(NULL, &context), PICKET_OK);
    plane p = wire(context, ends[family / 2], ends[family % 2]);
    pk_section *quarter = plane_section(&p, 1, true);
    pk_section_mode mode, modes[MODES];
    int found = 0;
    double complex shift = K0 * K0 * 3.5 * 3.5;
    assert_int_equal(pk_section_modes(quarter, K0, shift, 1, &mode, &found), PICKET_OK);
    double_axis(context, &p.x);
    double_axis(context, &p.y);
    pk_section *full = plane_section(&p, 1, true);
    assert_int_equal(pk_section_modes(full, K0, shift, MODES, modes, &found), PICKET_OK);
    int match = 0;
    for (int i = 1; i < found; i++) {
      bool nearer = cabs(modes[i].beta - mode.beta) < cabs(modes[match].beta - mode.beta);
      match = nearer ? i : match;
    }
    assert_near(cabs(modes[match].beta / mode.beta - 1), 0, 1e-9);
    pk_section_whole a, b;
    take_whole(&p, quarter, &mode, true, &a);
    take_whole(&p, full, &modes[match], false, &b);
    places_agree(&a, &b);
    double aa = creal(inner(&a, &a)), bb = creal(inner(&b, &b));
    double complex ab = inner(&a, &b);
    assert_true(aa > 0 && bb > 0);
    assert_near(cabs(ab) / sqrt(aa * bb), 1, 1e-12);
    pk_section_whole_clear(&a);
    pk_section_whole_clear(&b);
    pk_section_modes_clear(context, 1, &mode);
    pk_section_modes_clear(context, found, modes);
    pk_section_free(quarter);
    pk_section_free(full);
    plane_close(&p);
  }
}

static void walls_hold_zeros_and_shapes_are_named(void **state) {
  (void)state;
  picket_context *context = NULL;
  assert_int_equal(picket_context_create(NULL, &context), PICKET_OK);
  plane p = wire(context, PK_END_FREE, PK_END_ZERO);
  pk_section *section = plane_section(&p, 1, true);
  pk_section_mode mode;
  int found = 0;
  assert_int_equal(pk_section_modes(section, K0, K0 * K0 * 12.2, 1, &mode, &found), PICKET_OK);
  pk_section_whole w;
  take_whole(&p, section, &mode, true, &w);
  int columns = pk_whole_count(&w, PK_WHOLE_EZ, PK_U), rows = pk_whole_count(&w, PK_WHOLE_EZ, PK_V);
  assert_int_equal(columns, 2 * p.x.intervals + 1);
  assert_int_equal(pk_whole_count(&w, PK_WHOLE_HZ, PK_V), 2 * p.y.intervals);
  for (int j = 0; j < rows; j++) {
    assert_true(w.field[PK_WHOLE_EZ][j] == 0);
    assert_true(w.field[PK_WHOLE_EZ][(columns - 1) * rows + j] == 0);
  }
  assert_ptr_equal(pk_whole_places(&w, PK_WHOLE_EX, PK_U), w.middle[PK_U]);
  assert_ptr_equal(pk_whole_places(&w, PK_WHOLE_EX, PK_V), w.line[PK_V]);
  pk_section_whole_clear(&w);
  pk_section_whole_clear(&w);
  pk_section_modes_clear(context, 1, &mode);
  pk_section_free(section);
  plane_close(&p);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(a_quarter_unfolds_to_the_whole),
      cmocka_unit_test(walls_hold_zeros_and_shapes_are_named),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
