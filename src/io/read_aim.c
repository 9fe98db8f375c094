/* aim and rules: which number of the file is varied for which target, and what a mask allows; with
 * what tolerance shares with them. See read.h. */
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "base/memory.h"
#include "io/read.h"
#include "io/vary.h"

enum { PATH_BYTES = 190 };                 /* fits a message */
static const double LARGEST = 1e9;         /* of a number that is varied or aimed at */
static const double FEATURE_HIGH_NM = 1e5; /* 100 µm: no rule is coarser */

enum { KEY_VARY, KEY_BETWEEN, KEY_QUANTITY, KEY_TARGET, KEY_AT, KEY_ALSO, KEY_FAMILY, KEY_COUNT };
static const pk_key keys[KEY_COUNT] = {
    [KEY_VARY] = {"vary", true},         [KEY_BETWEEN] = {"between", true},
    [KEY_QUANTITY] = {"quantity", true}, [KEY_TARGET] = {"target", true},
    [KEY_AT] = {"at_nm", false},         [KEY_ALSO] = {"also", false},
    [KEY_FAMILY] = {"family", false},
};
enum { ALSO_COUNT = KEY_ALSO }; /* a second target has the first keys */

/* Blocks that say nothing about the structure: nothing in them can be varied. */
static const char *const FIXED[] = {"format", "name", "aim", "tolerance", "taper", "rules", "path"};

static picket_status fail_path(picket_context *context, const pk_node *node, const char *why) {
  char kept[300];
  snprintf(kept, sizeof kept, "%s", why); /* `why` may be the message itself */
  return pk_fail_at(context, PICKET_ERROR_INPUT, node->place, "%s is \"%s\", must be %s",
                    pk_node_path(node).text, node->text, kept);
}

picket_status pk_read_vary(const pk_reader *reader, const pk_document *document,
                           const pk_node *node, char **out) {
  picket_context *context = reader->context;
  const char *path = NULL;
  picket_status status = pk_read_text(context, node, PATH_BYTES, &path);
  for (size_t i = 0; status == PICKET_OK && i < sizeof FIXED / sizeof *FIXED; i++) {
    size_t length = strlen(FIXED[i]);
    if (strncmp(path, FIXED[i], length) == 0 && (path[length] == '\0' || path[length] == '.')) {
      return fail_path(context, node,
                       "the path of a number of the structure, its materials, the "
                       "light or the temperature");
    }
  }
  if (status == PICKET_OK) {
    pk_node *found = NULL;
    double value = 0;
    /* Looking something up leaves a document as it is. */
    status = pk_vary_value((pk_document *)document, path, &found, &value);
    if (status == PICKET_ERROR_INPUT) {
      return fail_path(context, node,
                       "the dotted path of a single finite number that the file states, such as "
                       "cell.pitch_nm or cell.shapes.0.width_nm");
    }
  }
  if (status == PICKET_OK) {
    *out = pk_text_copy(context, path);
    status = *out ? PICKET_OK : PICKET_ERROR_MEMORY;
  }
  return status;
}

static picket_status read_between(picket_context *context, const pk_node *node, double *between) {
  const pk_limits limits = {-LARGEST, LARGEST, false, false, false, ""};
  picket_status status = pk_read_numbers(context, node, &limits, 2, between);
  if (status == PICKET_OK && !(between[0] < between[1])) {
    status = pk_fail_at(context, PICKET_ERROR_INPUT, node->place,
                        "%s is [%.10g, %.10g], must be two rising numbers", pk_node_path(node).text,
                        between[0], between[1]);
  }
  return status;
}

picket_status pk_read_measured(picket_context *context, const pk_node *node, pk_measured *out) {
  const char *names[PK_MEASURED_COUNT];
  int choice = 0;
  for (int i = 0; i < PK_MEASURED_COUNT; i++) {
    names[i] = pk_measured_name((pk_measured)i);
  }
  picket_status status = pk_read_choice(context, node, names, PK_MEASURED_COUNT, &choice);
  *out = (pk_measured)choice;
  return status;
}

picket_status pk_read_at(picket_context *context, const pk_node *block, const pk_node *node,
                         pk_measured quantity, double *at_um) {
  const pk_limits limits = {PK_WAVELENGTH_LOW_NM, PK_WAVELENGTH_HIGH_NM, false, false, false, "nm"};
  bool needed = pk_measured_at_wavelength(quantity);
  double nm = NAN;
  if (needed && !node) {
    return pk_fail_at(context, PICKET_ERROR_INPUT, block->place,
                      "%s has no \"at_nm\", the wavelength at which %s is meant",
                      pk_node_path(block).text, pk_measured_name(quantity));
  }
  picket_status status = node ? pk_read_number(context, node, &limits, &nm) : PICKET_OK;
  *at_um = needed ? nm / PK_NM_PER_UM : NAN;
  return status;
}

static picket_status read_part(const pk_reader *reader, const pk_document *document,
                               const pk_node *block, const pk_node *const *values,
                               pk_aim_part *part) {
  picket_context *context = reader->context;
  const pk_limits limits = {-LARGEST, LARGEST, false, false, false, ""};
  part->place = values[KEY_QUANTITY]->place;
  picket_status status = pk_read_vary(reader, document, values[KEY_VARY], &part->vary);
  if (status == PICKET_OK) {
    status = read_between(context, values[KEY_BETWEEN], part->between);
  }
  if (status == PICKET_OK) {
    status = pk_read_measured(context, values[KEY_QUANTITY], &part->quantity);
  }
  if (status == PICKET_OK) {
    status = pk_read_number(context, values[KEY_TARGET], &limits, &part->target);
  }
  return status == PICKET_OK
             ? pk_read_at(context, block, values[KEY_AT], part->quantity, &part->at_um)
             : status;
}

/* A second number and its target. */
static picket_status read_also(const pk_reader *reader, const pk_document *document,
                               const pk_node *node, pk_aim_block *aim) {
  const pk_node *values[ALSO_COUNT];
  picket_status status = pk_read_block(reader->context, node, keys, ALSO_COUNT, values);
  if (status == PICKET_OK) {
    status = read_part(reader, document, node, values, &aim->part[1]);
  }
  if (status == PICKET_OK && strcmp(aim->part[0].vary, aim->part[1].vary) == 0) {
    status = pk_fail_at(reader->context, PICKET_ERROR_INPUT, values[KEY_VARY]->place,
                        "%s is \"%s\" again, must be another number",
                        pk_node_path(values[KEY_VARY]).text, aim->part[1].vary);
  }
  aim->count = 2;
  return status;
}

picket_status pk_read_aim(pk_reader *reader, const pk_document *document, const pk_node *node) {
  static const char *const families[] = {"te-like", "tm-like", "both"};
  pk_aim_block *aim = &reader->problem->aim;
  const pk_node *values[KEY_COUNT];
  int family = 0;
  picket_status status = pk_read_block(reader->context, node, keys, KEY_COUNT, values);
  aim->given = true;
  aim->count = 1;
  if (status == PICKET_OK) {
    status = read_part(reader, document, node, values, &aim->part[0]);
  }
  if (status == PICKET_OK && values[KEY_ALSO]) {
    status = read_also(reader, document, values[KEY_ALSO], aim);
  }
  if (status == PICKET_OK && values[KEY_FAMILY]) {
    status = pk_read_choice(reader->context, values[KEY_FAMILY], families, 3, &family);
  }
  aim->family_given = values[KEY_FAMILY] != NULL;
  aim->wanted[0] = family != 1;
  aim->wanted[1] = family != 0;
  return status;
}

enum { RULE_SMALLEST, RULE_GRID, RULE_COUNT };
static const pk_key rule_keys[RULE_COUNT] = {
    [RULE_SMALLEST] = {"smallest_feature_nm", false},
    [RULE_GRID] = {"grid_nm", false},
};

picket_status pk_read_rules(pk_reader *reader, const pk_node *node) {
  const pk_limits limits = {0, FEATURE_HIGH_NM, true, false, false, "nm"};
  pk_rules_block *rules = &reader->problem->rules;
  const pk_node *values[RULE_COUNT];
  double nm[RULE_COUNT] = {0, 0};
  picket_status status = pk_read_block(reader->context, node, rule_keys, RULE_COUNT, values);
  for (int i = 0; status == PICKET_OK && i < RULE_COUNT; i++) {
    if (values[i]) {
      status = pk_read_number(reader->context, values[i], &limits, &nm[i]);
    }
  }
  rules->given = true;
  rules->smallest_um = nm[RULE_SMALLEST] / PK_NM_PER_UM;
  rules->grid_um = nm[RULE_GRID] / PK_NM_PER_UM;
  return status;
}
