/* Film stacks: the block `slab`, and the part of it that a slab material shares. See read.h. */
#include "base/memory.h"
#include "io/read.h"

enum { MOST_FILMS = 1000 };

enum { KEY_POLARIZATION = PK_STACK_KEYS, KEY_COUNT };
static const pk_key keys[KEY_COUNT] = {
    [PK_STACK_SUBSTRATE] = {"substrate", true},
    [PK_STACK_FILMS] = {"films", true},
    [PK_STACK_COVER] = {"cover", true},
    [KEY_POLARIZATION] = {"polarization", false},
};

enum { FILM_FILL, FILM_THICKNESS, FILM_COUNT };
static const pk_key film_keys[FILM_COUNT] = {
    [FILM_FILL] = {"fill", true},
    [FILM_THICKNESS] = {"thickness_nm", true},
};

static picket_status read_film(const pk_reader *reader, const pk_node *node, int *material,
                               double *thickness_um) {
  const pk_limits limits = {0, PK_LENGTH_HIGH_NM, true, false, false, "nm"};
  const pk_node *values[FILM_COUNT];
  double nm = 0;
  picket_status status = pk_read_block(reader->context, node, film_keys, FILM_COUNT, values);
  if (status == PICKET_OK) {
    status = pk_read_material(reader, values[FILM_FILL], material);
  }
  if (status == PICKET_OK) {
    status = pk_read_number(reader->context, values[FILM_THICKNESS], &limits, &nm);
  }
  if (status == PICKET_OK) {
    *thickness_um = nm / PK_NM_PER_UM;
  }
  return status;
}

void pk_slab_recipe_clear(picket_context *context, pk_slab_recipe *recipe) {
  pk_free(context, (void *)recipe->film_material);
  pk_free(context, (void *)recipe->film_thickness_um);
  recipe->film_material = NULL;
  recipe->film_thickness_um = NULL;
  recipe->film_count = 0;
}

picket_status pk_read_films(const pk_reader *reader, const pk_node *films, pk_slab_recipe *recipe) {
  picket_context *context = reader->context;
  picket_status status = pk_read_list(context, films, 1, MOST_FILMS, "films");
  if (status != PICKET_OK) {
    return status;
  }
  int *material = PK_NEW(context, films->count, int);
  double *thickness = material ? PK_NEW(context, films->count, double) : NULL;
  recipe->film_material = material;
  recipe->film_thickness_um = thickness;
  recipe->film_count = films->count;
  status = thickness ? PICKET_OK : PICKET_ERROR_MEMORY;
  int i = 0;
  for (const pk_node *film = films->first; status == PICKET_OK && film; film = film->next, i++) {
    status = read_film(reader, film, &material[i], &thickness[i]);
  }
  if (status != PICKET_OK) {
    pk_slab_recipe_clear(context, recipe);
  }
  return status;
}

picket_status pk_read_stack(const pk_reader *reader, const pk_node *const *values,
                            pk_slab_recipe *recipe) {
  picket_status status = pk_read_material(reader, values[PK_STACK_SUBSTRATE], &recipe->substrate);
  if (status == PICKET_OK) {
    status = pk_read_material(reader, values[PK_STACK_COVER], &recipe->cover);
  }
  return status == PICKET_OK ? pk_read_films(reader, values[PK_STACK_FILMS], recipe) : status;
}

picket_status pk_read_slab(pk_reader *reader, const pk_node *node) {
  static const char *const words[] = {"te", "tm", "both"};
  pk_slab_block *slab = &reader->problem->slab;
  const pk_node *values[KEY_COUNT];
  int choice = 2;
  picket_status status = pk_read_block(reader->context, node, keys, KEY_COUNT, values);
  if (status == PICKET_OK && values[KEY_POLARIZATION]) {
    status = pk_read_choice(reader->context, values[KEY_POLARIZATION], words, 3, &choice);
  }
  if (status == PICKET_OK) {
    status = pk_read_stack(reader, values, &slab->recipe);
  }
  slab->given = true;
  slab->place = node->place;
  slab->wanted[PK_SLAB_TE] = choice != 1;
  slab->wanted[PK_SLAB_TM] = choice != 0;
  return status;
}
