/* materials: named index models. They may stand in any order, so a slab can name a material below
 * it: passes over the block add whatever has all its films already, until nothing is left or
 * nothing moves, which is a circle. See read.h. */
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "base/memory.h"
#include "io/read.h"
#include "io/text.h"

enum {
  MOST_MATERIALS = 200,
  NAME_BYTES = 60,
  MOST_TERMS = 8,      /* of a Sellmeier sum; published ones have up to 5 */
  HIGHEST_ORDER = 100, /* of a slab mode */
  PATH_BYTES = 4000
};
static const double LARGEST_INDEX = 100.0; /* well above any optical medium */

enum {
  KIND_CATALOGUE,
  KIND_CONSTANT,
  KIND_SELLMEIER,
  KIND_TABLE,
  KIND_SLAB,
  KIND_LAYERED,
  KIND_COUNT
};
static const char *const kinds[KIND_COUNT] = {"catalogue", "constant", "sellmeier",
                                              "table",     "slab",     "layered"};

enum { CONSTANT_INDEX, CONSTANT_EXTINCTION, CONSTANT_DN_DT, CONSTANT_NUMBERS };
enum { CONSTANT_GAIN = CONSTANT_NUMBERS, CONSTANT_COUNT };
static const pk_key constant_keys[CONSTANT_COUNT] = {
    [CONSTANT_INDEX] = {"index", true},
    [CONSTANT_EXTINCTION] = {"extinction", false},
    [CONSTANT_DN_DT] = {"dn_dt_per_k", false},
    [CONSTANT_GAIN] = {"gain", false},
};

enum { SELLMEIER_B, SELLMEIER_C, SELLMEIER_COUNT };
static const pk_key sellmeier_keys[SELLMEIER_COUNT] = {
    [SELLMEIER_B] = {"b", true},
    [SELLMEIER_C] = {"c_um", true},
};

enum { TABLE_CSV, TABLE_COUNT };
static const pk_key table_keys[TABLE_COUNT] = {[TABLE_CSV] = {"csv", true}};

enum { SLAB_POLARIZATION = PK_STACK_KEYS, SLAB_ORDER, SLAB_COUNT };
static const pk_key slab_keys[SLAB_COUNT] = {
    [PK_STACK_SUBSTRATE] = {"substrate", true},
    [PK_STACK_FILMS] = {"films", true},
    [PK_STACK_COVER] = {"cover", true},
    [SLAB_POLARIZATION] = {"polarization", true},
    [SLAB_ORDER] = {"order", false},
};

enum { LAYERED_FILMS, LAYERED_COUNT };
static const pk_key layered_keys[LAYERED_COUNT] = {[LAYERED_FILMS] = {"films", true}};

picket_status pk_read_material_name(const pk_reader *reader, const pk_node *node,
                                    const char **out) {
  const char *name = NULL;
  picket_status status = pk_read_text(reader->context, node, NAME_BYTES, &name);
  if (status != PICKET_OK) {
    return status;
  }
  const char *names[MOST_MATERIALS];
  int count = 0;
  const pk_node *first = reader->materials ? reader->materials->first : NULL;
  for (const pk_node *known = first; known && count < MOST_MATERIALS; known = known->next) {
    if (strcmp(known->key, name) == 0) {
      *out = name;
      return PICKET_OK;
    }
    names[count++] = known->key;
  }
  if (count == 0) {
    return pk_fail_at(reader->context, PICKET_ERROR_INPUT, node->place,
                      "%s is \"%s\", but the file defines no materials", pk_node_path(node).text,
                      name);
  }
  return pk_fail_at(reader->context, PICKET_ERROR_INPUT, node->place,
                    "%s is \"%s\", which is not in materials; %s", pk_node_path(node).text,
                    pk_text_shown(name).text, pk_words_advice(name, names, count).text);
}

picket_status pk_read_material(const pk_reader *reader, const pk_node *node, int *out) {
  const char *name = NULL;
  picket_status status = pk_read_material_name(reader, node, &name);
  if (status == PICKET_OK) {
    int found = pk_materials_find(reader->problem->materials, name);
    if (found >= 0 && !reader->layered &&
        pk_materials_is_layered(reader->problem->materials, found)) {
      return pk_fail_at(reader->context, PICKET_ERROR_INPUT, node->place,
                        "%s is \"%s\", which is layered: only a section or a channel can hold it",
                        pk_node_path(node).text, pk_text_shown(name).text);
    }
    *out = found;
  }
  return status;
}

/* A material being added: its name stands at `name->key`, its kind's block is `value`. */
typedef struct entry {
  const pk_node *name;
  const pk_node *value;
} entry;

static picket_status add_catalogue(const pk_reader *reader, const entry *e) {
  const char *word = NULL;
  picket_status status = pk_read_text(reader->context, e->value, NAME_BYTES, &word);
  if (status == PICKET_OK) {
    status =
        pk_materials_add_catalogue(reader->problem->materials, e->value->place, e->name->key, word);
  }
  return status;
}

static picket_status add_constant(const pk_reader *reader, const entry *e) {
  static const pk_limits index = {0, LARGEST_INDEX, true, false, false, ""};
  static const pk_limits extinction = {
      0, LARGEST_INDEX, false, false, false, "(a medium that amplifies needs gain: true)"};
  static const pk_limits either = {-LARGEST_INDEX, LARGEST_INDEX, false, false, false, ""};
  static const pk_limits dn_dt = {-1, 1, false, false, false, "1/K"};
  static const char *const answers[] = {"false", "true"};
  const pk_node *values[CONSTANT_COUNT];
  double number[CONSTANT_NUMBERS] = {0};
  int gain = 0;
  picket_status status =
      pk_read_block(reader->context, e->value, constant_keys, CONSTANT_COUNT, values);
  if (status == PICKET_OK && values[CONSTANT_GAIN]) {
    status = pk_read_choice(reader->context, values[CONSTANT_GAIN], answers, 2, &gain);
  }
  const pk_limits *const limits[] = {&index, gain ? &either : &extinction, &dn_dt};
  for (int i = 0; status == PICKET_OK && i < CONSTANT_NUMBERS; i++) {
    if (values[i]) {
      status = pk_read_number(reader->context, values[i], limits[i], &number[i]);
    }
  }
  if (status == PICKET_OK) {
    status = (gain ? pk_materials_add_amplifier : pk_materials_add_constant)(
        reader->problem->materials, e->value->place, e->name->key, number[CONSTANT_INDEX],
        number[CONSTANT_EXTINCTION], number[CONSTANT_DN_DT]);
  }
  return status;
}

static picket_status add_sellmeier(const pk_reader *reader, const entry *e) {
  static const pk_limits strength = {-1e4, 1e4, false, false, false, ""};
  static const pk_limits resonance = {0, 1e4, false, false, false, "um"};
  picket_context *context = reader->context;
  const pk_node *values[SELLMEIER_COUNT];
  double b[MOST_TERMS];
  double c[MOST_TERMS];
  picket_status status = pk_read_block(context, e->value, sellmeier_keys, SELLMEIER_COUNT, values);
  if (status == PICKET_OK) {
    status = pk_read_list(context, values[SELLMEIER_B], 1, MOST_TERMS, "numbers");
  }
  if (status == PICKET_OK) {
    status =
        pk_read_numbers(context, values[SELLMEIER_B], &strength, values[SELLMEIER_B]->count, b);
  }
  if (status == PICKET_OK) {
    status =
        pk_read_numbers(context, values[SELLMEIER_C], &resonance, values[SELLMEIER_B]->count, c);
  }
  if (status == PICKET_OK) {
    status = pk_materials_add_sellmeier(reader->problem->materials, e->value->place, e->name->key,
                                        values[SELLMEIER_B]->count, b, c);
  }
  return status;
}

static picket_status add_table(const pk_reader *reader, const entry *e) {
  picket_context *context = reader->context;
  const pk_node *values[TABLE_COUNT];
  const char *csv = NULL;
  pk_index_table table = {0, NULL, NULL, NULL};
  picket_status status = pk_read_block(context, e->value, table_keys, TABLE_COUNT, values);
  if (status == PICKET_OK) {
    status = pk_read_text(context, values[TABLE_CSV], PATH_BYTES, &csv);
  }
  if (status != PICKET_OK) {
    return status;
  }
  const char *folder = csv[0] == '/' ? "" : reader->folder;
  size_t length = strlen(folder) + strlen(csv) + 1;
  char *path = PK_NEW(context, length, char);
  if (!path) {
    return PICKET_ERROR_MEMORY;
  }
  snprintf(path, length, "%s%s", folder, csv);
  status = pk_read_index_table(context, values[TABLE_CSV]->place, path, &table);
  if (status == PICKET_OK) {
    status =
        pk_materials_add_table(reader->problem->materials, values[TABLE_CSV]->place, e->name->key,
                               table.count, table.wavelength_um, table.n, table.k);
  }
  pk_index_table_clear(context, &table);
  pk_free(context, path);
  return status;
}

static picket_status add_layered(const pk_reader *reader, const entry *e) {
  const pk_node *values[LAYERED_COUNT];
  pk_slab_recipe recipe = {0};
  picket_status status =
      pk_read_block(reader->context, e->value, layered_keys, LAYERED_COUNT, values);
  if (status == PICKET_OK) {
    status = pk_read_films(reader, values[LAYERED_FILMS], &recipe);
  }
  if (status == PICKET_OK) {
    status = pk_materials_add_layered(reader->problem->materials, e->value->place, e->name->key,
                                      &recipe);
  }
  pk_slab_recipe_clear(reader->context, &recipe);
  return status;
}

static picket_status add_slab(const pk_reader *reader, const entry *e) {
  static const char *const words[] = {"te", "tm"};
  picket_context *context = reader->context;
  const pk_node *values[SLAB_COUNT];
  pk_slab_recipe recipe = {0};
  int choice = 0;
  picket_status status = pk_read_block(context, e->value, slab_keys, SLAB_COUNT, values);
  if (status == PICKET_OK) {
    status = pk_read_choice(context, values[SLAB_POLARIZATION], words, 2, &choice);
  }
  if (status == PICKET_OK && values[SLAB_ORDER]) {
    status = pk_read_whole(context, values[SLAB_ORDER], 0, HIGHEST_ORDER, &recipe.order);
  }
  if (status == PICKET_OK) {
    status = pk_read_stack(reader, values, &recipe);
  }
  if (status == PICKET_OK) {
    recipe.polarization = choice == 0 ? PK_SLAB_TE : PK_SLAB_TM;
    status =
        pk_materials_add_slab(reader->problem->materials, e->value->place, e->name->key, &recipe);
  }
  pk_slab_recipe_clear(context, &recipe);
  return status;
}

/* Whether a value of a stack names a material that is there already. A value of another form, or a
 * name that is in no line of the file, counts as there: reading it then tells what is wrong. */
static bool is_there(const pk_reader *reader, const pk_node *value) {
  if (!value || value->kind != PK_NODE_TEXT || !pk_node_get(reader->materials, value->text)) {
    return true;
  }
  return pk_materials_find(reader->problem->materials, value->text) >= 0;
}

static bool is_ready(const pk_reader *reader, const pk_node *slab) {
  const pk_node *films = pk_node_get(slab, "films");
  bool ready = is_there(reader, pk_node_get(slab, "substrate")) &&
               is_there(reader, pk_node_get(slab, "cover"));
  const pk_node *film = films ? films->first : NULL;
  for (; ready && film; film = film->next) {
    ready = is_there(reader, pk_node_get(film, "fill"));
  }
  return ready;
}

/* Adds a material if all it needs is there; *added tells. */
static picket_status try_material(const pk_reader *reader, const pk_node *name, bool *added) {
  static picket_status (*const add[KIND_COUNT])(const pk_reader *, const entry *) = {
      [KIND_CATALOGUE] = add_catalogue, [KIND_CONSTANT] = add_constant,
      [KIND_SELLMEIER] = add_sellmeier, [KIND_TABLE] = add_table,
      [KIND_SLAB] = add_slab,           [KIND_LAYERED] = add_layered,
  };
  entry e = {name, NULL};
  int kind = 0;
  picket_status status = pk_read_kind(reader->context, name, kinds, KIND_COUNT, &kind, &e.value);
  *added = false;
  if (status == PICKET_OK &&
      ((kind != KIND_SLAB && kind != KIND_LAYERED) || is_ready(reader, e.value))) {
    status = add[kind](reader, &e);
    *added = status == PICKET_OK;
  }
  return status;
}

/* One pass over the block; *left and *moved count what is not and what was newly added, *waiting is
 * the first that is not. */
static picket_status add_ready(const pk_reader *reader, int *left, int *moved,
                               const pk_node **waiting) {
  *left = *moved = 0;
  for (const pk_node *name = reader->materials->first; name; name = name->next) {
    if (pk_materials_find(reader->problem->materials, name->key) >= 0) {
      continue;
    }
    bool added = false;
    picket_status status = try_material(reader, name, &added);
    if (status != PICKET_OK) {
      return status;
    }
    if (!added && (*left)++ == 0) {
      *waiting = name;
    }
    *moved += added;
  }
  return PICKET_OK;
}

static picket_status check_block(const pk_reader *reader) {
  const pk_node *block = reader->materials;
  if (block->kind != PK_NODE_MAP) {
    return pk_fail_at(reader->context, PICKET_ERROR_INPUT, block->place,
                      "materials must be a block of names, such as oxide: {catalogue: silica}");
  }
  if (block->count > MOST_MATERIALS) {
    return pk_fail_at(reader->context, PICKET_ERROR_INPUT, block->place,
                      "materials has %d entries, must be at most %d", block->count, MOST_MATERIALS);
  }
  for (const pk_node *name = block->first; name; name = name->next) {
    if (strlen(name->key) > NAME_BYTES) {
      return pk_fail_at(reader->context, PICKET_ERROR_INPUT, name->key_place,
                        "the name of a material has %zu bytes, must be at most %d",
                        strlen(name->key), NAME_BYTES);
    }
  }
  return PICKET_OK;
}

picket_status pk_read_materials(pk_reader *reader) {
  picket_status status = pk_materials_create(reader->context, &reader->problem->materials);
  if (status == PICKET_OK && reader->materials) {
    status = check_block(reader);
  }
  int left = reader->materials ? 1 : 0;
  while (status == PICKET_OK && left > 0) {
    int moved = 0;
    const pk_node *waiting = NULL;
    status = add_ready(reader, &left, &moved, &waiting);
    if (status == PICKET_OK && left > 0 && moved == 0) {
      status = pk_fail_at(reader->context, PICKET_ERROR_INPUT, waiting->key_place,
                          "%s is made of itself: its films lead back to it in a circle",
                          pk_node_path(waiting).text);
    }
  }
  return status;
}
