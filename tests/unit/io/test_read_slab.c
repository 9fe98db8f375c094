/* slab: a stack of films, as a block and as a material. */
#include "reading.h"
#include "unit/near.h"

static const bad_text bad_slab[] = {
    REFUSED("3:33", "slab.films has 0 elements, must be a list of 1 to 1000 films",
            MATERIALS "slab: {substrate: oxide, films: [], cover: oxide}\n"),
    REFUSED("3:33", "slab.films is a block, must be a list of 1 to 1000 films",
            MATERIALS
            "slab: {substrate: oxide, films: {fill: si, thickness_nm: 220}, cover: oxide}\n"),
    REFUSED("3:34", "slab.films.0 has no \"thickness_nm\"",
            MATERIALS "slab: {substrate: oxide, films: [{fill: si}], cover: oxide}\n"),
    REFUSED("3:59", "slab.films.0.thickness_nm is 0, must be above 0",
            MATERIALS
            "slab: {substrate: oxide, films: [{fill: si, thickness_nm: 0}], cover: oxide}\n"),
    REFUSED("3:59", "slab.films.0.thickness_nm is .inf, must be above 0",
            MATERIALS
            "slab: {substrate: oxide, films: [{fill: si, thickness_nm: .inf}], cover: oxide}\n"),
    REFUSED("3:41", "slab.films.0.fill is \"s\", which is not in materials",
            MATERIALS
            "slab: {substrate: oxide, films: [{fill: s, thickness_nm: 1}], cover: oxide}\n"),
    REFUSED("3:92", "slab.polarization is \"hy\", must be one of: te, tm, both",
            MATERIALS "slab: {substrate: oxide, films: [{fill: si, thickness_nm: 1}], cover: "
                      "oxide, polarization: hy}\n"),
    REFUSED(
        "3:78", "unknown key \"order\" in slab",
        MATERIALS
        "slab: {substrate: oxide, films: [{fill: si, thickness_nm: 1}], cover: oxide, order: 0}\n"),
    REFUSED("2:87", "materials.a.slab has no \"polarization\"",
            FORMAT
            "materials: {oxide: {constant: {index: 1.45}}, si: {constant: {index: 3.5}}, a: {slab: "
            "{substrate: oxide, films: [{fill: si, thickness_nm: 1}], cover: oxide}}}\n"),
    REFUSED("2:172", "materials.a.slab.polarization is \"both\", must be one of: te, tm",
            FORMAT "materials: {oxide: {constant: {index: 1.45}}, si: {constant: {index: 3.5}}, a: "
                   "{slab: {substrate: oxide, films: [{fill: si, thickness_nm: 1}], cover: oxide, "
                   "polarization: both}}}\n"),
    REFUSED("2:183", "materials.a.slab.order is -1, must be a whole number, 0 to 100",
            FORMAT "materials: {oxide: {constant: {index: 1.45}}, si: {constant: {index: 3.5}}, a: "
                   "{slab: {substrate: oxide, films: [{fill: si, thickness_nm: 1}], cover: oxide, "
                   "polarization: te, order: -1}}}\n"),
};

static void refuses_bad_slabs(void **state) {
  (void)state;
  CHECK_ALL_REFUSED(bad_slab);
}

static void understands_a_stack(void **state) {
  (void)state;
  picket_context *context = plain_context();
  pk_document *document = NULL;
  pk_problem *p =
      sound(context,
            MATERIALS
            "slab:\n"
            "  substrate: oxide\n"
            "  films: [{fill: si, thickness_nm: 220}, {fill: oxide, thickness_nm: 0.5}]\n"
            "  cover: si\n"
            "  polarization: tm\n",
            &document);
  int oxide = pk_materials_find(p->materials, "oxide");
  int si = pk_materials_find(p->materials, "si");
  assert_int_equal(p->slab.recipe.substrate, oxide);
  assert_int_equal(p->slab.recipe.cover, si);
  assert_int_equal(p->slab.recipe.film_count, 2);
  assert_int_equal(p->slab.recipe.film_material[0], si);
  assert_int_equal(p->slab.recipe.film_material[1], oxide);
  assert_near(p->slab.recipe.film_thickness_um[0], 0.22, 0);
  assert_near(p->slab.recipe.film_thickness_um[1], 0.0005, 0);
  assert_false(p->slab.wanted[PK_SLAB_TE]);
  assert_true(p->slab.wanted[PK_SLAB_TM]);
  assert_int_equal(p->slab.place.line, 4);
  pk_problem_free(p);
  pk_document_free(document);
  picket_context_free(context);
}

static void wants_both_polarizations_by_default(void **state) {
  (void)state;
  picket_context *context = plain_context();
  pk_document *document = NULL;
  pk_problem *p = sound(
      context,
      MATERIALS "slab: {substrate: oxide, films: [{fill: si, thickness_nm: 220}], cover: oxide}\n",
      &document);
  assert_true(p->slab.wanted[PK_SLAB_TE] && p->slab.wanted[PK_SLAB_TM]);
  pk_problem_free(p);
  pk_document_free(document);
  picket_context_free(context);
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test(refuses_bad_slabs),
      cmocka_unit_test(understands_a_stack),
      cmocka_unit_test(wants_both_polarizations_by_default),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
