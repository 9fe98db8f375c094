/* taper: a row of cells or channels whose numbers change tooth by tooth. See read.h. */
#include <math.h>
#include <string.h>

#include "io/read.h"

static const double LARGEST = 1e9;                            /* of a number that changes */
static const double EXPONENT_LOW = 0.01, EXPONENT_HIGH = 100; /* beyond, a row is a single step */
static const double FIBRE_HIGH_UM = 1000;                     /* as everywhere a beam is given */
enum { LEAST_TEETH = 2 };

/* --- One number --------------------------------------------------------------------------------
 */

enum { CHANGE_VARY, CHANGE_FROM, CHANGE_TO, CHANGE_LAW, CHANGE_EXPONENT, CHANGE_KEYS };
static const pk_key change_keys[CHANGE_KEYS] = {
    [CHANGE_VARY] = {"vary", true},
    [CHANGE_FROM] = {"from", true},
    [CHANGE_TO] = {"to", true},
    [CHANGE_LAW] = {"law", false},
    [CHANGE_EXPONENT] = {"exponent", false},
};

static bool lies_in(const char *path, const char *block) {
  size_t length = strlen(block);
  return strncmp(path, block, length) == 0 && (path[length] == '.' || path[length] == '\0');
}

/* A tooth has no light and no slab of its own. */
static picket_status check_path(picket_context *context, const pk_node *node,
                                const pk_taper_block *taper) {
  const char *path = taper->change[taper->count].vary;
  bool drawn = lies_in(path, "cell") || lies_in(path, "channel");
  if (!drawn && !lies_in(path, "materials") && !lies_in(path, "temperature_c")) {
    return pk_fail_at(context, PICKET_ERROR_INPUT, node->place,
                      "%s is \"%s\", must be the path of a number of the cell, the channel, the "
                      "materials or the temperature: only these can change along a row",
                      pk_node_path(node).text, path);
  }
  for (int i = 0; i < taper->count; i++) {
    const char *other = taper->change[i].vary;
    if (strcmp(other, path) == 0) {
      return pk_fail_at(context, PICKET_ERROR_INPUT, node->place,
                        "%s is \"%s\" again, must be another number", pk_node_path(node).text,
                        path);
    }
    if ((lies_in(path, "cell") && lies_in(other, "channel")) ||
        (lies_in(path, "channel") && lies_in(other, "cell"))) {
      return pk_fail_at(context, PICKET_ERROR_INPUT, node->place,
                        "%s is \"%s\" beside \"%s\"; a row is of cells or of channels, not both",
                        pk_node_path(node).text, path, other);
    }
  }
  return PICKET_OK;
}

static picket_status read_law(picket_context *context, const pk_node *const *values,
                              pk_taper_change *change) {
  static const char *const laws[] = {"linear", "power", "cosine"};
  const pk_limits limits = {EXPONENT_LOW, EXPONENT_HIGH, false, false, false, ""};
  const pk_node *exponent = values[CHANGE_EXPONENT];
  int law = PICKET_TAPER_LINEAR;
  picket_status status = PICKET_OK;
  if (values[CHANGE_LAW]) {
    status = pk_read_choice(context, values[CHANGE_LAW], laws, 3, &law);
  }
  change->law = (picket_taper_law)law;
  change->exponent = 1;
  if (status == PICKET_OK && (law == PICKET_TAPER_POWER) != (exponent != NULL)) {
    const pk_node *node = exponent ? exponent : values[CHANGE_LAW];
    return pk_fail_at(context, PICKET_ERROR_INPUT, node->place,
                      exponent ? "%s is for the law \"power\" alone; the law is \"%s\""
                               : "%s is \"%s\", which needs an \"exponent\" beside it",
                      pk_node_path(node).text, exponent ? laws[law] : node->text);
  }
  return status == PICKET_OK && exponent
             ? pk_read_number(context, exponent, &limits, &change->exponent)
             : status;
}

static picket_status read_change(const pk_reader *reader, const pk_document *document,
                                 const pk_node *node, pk_taper_block *taper) {
  picket_context *context = reader->context;
  const pk_limits limits = {-LARGEST, LARGEST, false, false, false, ""};
  pk_taper_change *change = &taper->change[taper->count];
  const pk_node *values[CHANGE_KEYS];
  picket_status status = pk_read_block(context, node, change_keys, CHANGE_KEYS, values);
  if (status == PICKET_OK) {
    status = pk_read_vary(reader, document, values[CHANGE_VARY], &change->vary);
  }
  if (status == PICKET_OK) {
    status = check_path(context, values[CHANGE_VARY], taper);
  }
  if (status == PICKET_OK) {
    status = pk_read_number(context, values[CHANGE_FROM], &limits, &change->from);
  }
  if (status == PICKET_OK) {
    status = pk_read_number(context, values[CHANGE_TO], &limits, &change->to);
  }
  return status == PICKET_OK ? read_law(context, values, change) : status;
}

static picket_status read_changes(const pk_reader *reader, const pk_document *document,
                                  const pk_node *list, pk_taper_block *taper) {
  picket_status status =
      pk_read_list(reader->context, list, 1, PK_TAPER_CHANGES, "numbers that change");
  taper->of_channel = !reader->problem->has_cell;
  for (const pk_node *node = list->first; status == PICKET_OK && node; node = node->next) {
    status = read_change(reader, document, node, taper);
    if (status == PICKET_OK) {
      taper->of_channel = taper->of_channel || lies_in(taper->change[taper->count].vary, "channel");
      taper->count++;
    }
  }
  return status;
}

/* --- The row -----------------------------------------------------------------------------------
 */

enum { KEY_CHANGES, KEY_TEETH, KEY_AT, KEY_FIBRE, KEY_COUNT };
static const pk_key keys[KEY_COUNT] = {
    [KEY_CHANGES] = {"changes", true},
    [KEY_TEETH] = {"teeth", true},
    [KEY_AT] = {"at_nm", true},
    [KEY_FIBRE] = {"fibre", false},
};

static picket_status read_fibre(picket_context *context, const pk_node *node, double *um) {
  static const pk_key fibre_keys[] = {{"gaussian_um", true}};
  const pk_limits limits = {0, FIBRE_HIGH_UM, true, false, false, "um"};
  const pk_node *value = NULL;
  picket_status status = pk_read_block(context, node, fibre_keys, 1, &value);
  return status == PICKET_OK ? pk_read_number(context, value, &limits, um) : status;
}

picket_status pk_read_taper(pk_reader *reader, const pk_document *document, const pk_node *node) {
  const pk_limits limits = {PK_WAVELENGTH_LOW_NM, PK_WAVELENGTH_HIGH_NM, false, false, false, "nm"};
  picket_context *context = reader->context;
  pk_taper_block *taper = &reader->problem->taper;
  const pk_node *values[KEY_COUNT];
  double nm = NAN;
  picket_status status = pk_read_block(context, node, keys, KEY_COUNT, values);
  taper->given = true;
  taper->place = node->place;
  if (status == PICKET_OK) {
    status = pk_read_whole(context, values[KEY_TEETH], LEAST_TEETH, PK_TAPER_TEETH, &taper->teeth);
  }
  if (status == PICKET_OK) {
    status = pk_read_number(context, values[KEY_AT], &limits, &nm);
  }
  taper->at_um = nm / PK_NM_PER_UM;
  if (status == PICKET_OK) {
    status = read_changes(reader, document, values[KEY_CHANGES], taper);
  }
  if (status == PICKET_OK && values[KEY_FIBRE]) {
    status = read_fibre(context, values[KEY_FIBRE], &taper->fibre_um);
  }
  return status;
}
