/* tolerance: what a process spreads, and what must hold in spite of it. See read.h. */
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "base/memory.h"
#include "io/read.h"
#include "io/vary.h"

static const double LARGEST = 1e9; /* of a spread or a limit */
enum {
  MOST_SAMPLES = 10000000, /* ten million: their scatter is then 1e-4 and less of the yield */
  USUAL_SAMPLES = 10000,
  USUAL_SEED = 1,
  MOST_SEED = 999999999,
  MOST_DIRECT = 100000,
  USUAL_DIRECT = 200,
  GROUP_BYTES = 60
};
static const char TEMPERATURE[] = "temperature_c";

/* --- A spread -----------------------------------------------------------------------------------
 */

enum {
  SPREAD_VARY,
  SPREAD_SIGMA,
  SPREAD_SIGMA_NM,
  SPREAD_FROM,
  SPREAD_TO,
  SPREAD_GROUP,
  SPREAD_KEYS
};
static const pk_key spread_keys[SPREAD_KEYS] = {
    [SPREAD_VARY] = {"vary", true},
    [SPREAD_SIGMA] = {"sigma", false},
    [SPREAD_SIGMA_NM] = {"sigma_nm", false},
    [SPREAD_FROM] = {"from", false},
    [SPREAD_TO] = {"to", false},
    [SPREAD_GROUP] = {"group", false},
};

/* The temperature has a value in every file, said or not. */
static bool is_unsaid_temperature(const pk_document *document, const pk_node *node) {
  return node->kind == PK_NODE_TEXT && strcmp(node->text, TEMPERATURE) == 0 &&
         !pk_node_get(pk_document_root(document), TEMPERATURE);
}

static picket_status read_vary(const pk_reader *reader, const pk_document *document,
                               const pk_node *node, char **out) {
  if (is_unsaid_temperature(document, node)) {
    *out = pk_text_copy(reader->context, TEMPERATURE);
    return *out ? PICKET_OK : PICKET_ERROR_MEMORY;
  }
  return pk_read_vary(reader, document, node, out);
}

static picket_status read_sigma(picket_context *context, const pk_node *const *values,
                                pk_spread *spread) {
  const pk_node *node = values[SPREAD_SIGMA_NM] ? values[SPREAD_SIGMA_NM] : values[SPREAD_SIGMA];
  const pk_limits limits = {0, LARGEST, true, false, false, values[SPREAD_SIGMA_NM] ? "nm" : ""};
  if (values[SPREAD_SIGMA_NM] && !strstr(spread->vary, "_nm")) {
    return pk_fail_at(context, PICKET_ERROR_INPUT, node->place,
                      "%s is the spread of %s, which is no length; name it \"sigma\", in the unit "
                      "of that value",
                      pk_node_path(node).text, spread->vary);
  }
  spread->normal = true;
  return pk_read_number(context, node, &limits, &spread->sigma);
}

static picket_status read_range(picket_context *context, const pk_node *block,
                                const pk_node *const *values, pk_spread *spread) {
  const pk_limits limits = {-LARGEST, LARGEST, false, false, false, ""};
  for (int end = 0; end < 2; end++) {
    int key = end == 0 ? SPREAD_FROM : SPREAD_TO;
    if (!values[key]) {
      return pk_fail_at(context, PICKET_ERROR_INPUT, block->place,
                        "%s has no \"%s\"; a range has both \"from\" and \"to\"",
                        pk_node_path(block).text, spread_keys[key].name);
    }
    picket_status status =
        pk_read_number(context, values[key], &limits, end == 0 ? &spread->from : &spread->to);
    if (status != PICKET_OK) {
      return status;
    }
  }
  return spread->from < spread->to
             ? PICKET_OK
             : pk_fail_at(context, PICKET_ERROR_INPUT, block->place,
                          "%s has a range from %.10g to %.10g, must be two rising numbers",
                          pk_node_path(block).text, spread->from, spread->to);
}

/* Exactly one of sigma, sigma_nm, and from with to. */
static picket_status read_extent(picket_context *context, const pk_node *block,
                                 const pk_node *const *values, pk_spread *spread) {
  bool sigma = values[SPREAD_SIGMA], sigma_nm = values[SPREAD_SIGMA_NM];
  bool range = values[SPREAD_FROM] || values[SPREAD_TO];
  spread->sigma = spread->from = spread->to = NAN;
  if (sigma + sigma_nm + range != 1) {
    return pk_fail_at(context, PICKET_ERROR_INPUT, block->place,
                      "%s has %s, must have one of: sigma_nm or sigma (a normal spread), from and "
                      "to (a uniform one)",
                      pk_node_path(block).text,
                      sigma + sigma_nm + range == 0 ? "no extent"
                      : range                       ? "both a sigma and a range"
                                                    : "both sigma and sigma_nm");
  }
  return range ? read_range(context, block, values, spread) : read_sigma(context, values, spread);
}

static picket_status read_spread(const pk_reader *reader, const pk_document *document,
                                 const pk_node *node, pk_spread *spread) {
  picket_context *context = reader->context;
  const pk_node *values[SPREAD_KEYS];
  const char *group = NULL;
  picket_status status = pk_read_block(context, node, spread_keys, SPREAD_KEYS, values);
  spread->place = node->place;
  if (status == PICKET_OK) {
    status = read_vary(reader, document, values[SPREAD_VARY], &spread->vary);
  }
  if (status == PICKET_OK) {
    status = read_extent(context, node, values, spread);
  }
  if (status == PICKET_OK && values[SPREAD_GROUP]) {
    status = pk_read_text(context, values[SPREAD_GROUP], GROUP_BYTES, &group);
  }
  if (status == PICKET_OK && group) {
    spread->group = pk_text_copy(context, group);
    status = spread->group ? PICKET_OK : PICKET_ERROR_MEMORY;
  }
  return status;
}

/* --- All spreads --------------------------------------------------------------------------------
 */

/* The node of a number; null for the temperature where the file does not say it. */
static const pk_node *number_of(const pk_document *document, const pk_spread *spread) {
  pk_node *node = NULL;
  double value = 0;
  /* Looking something up leaves a document as it is. It was found before. */
  picket_status status = pk_vary_value((pk_document *)document, spread->vary, &node, &value);
  if (status != PICKET_OK) {
    pk_message_clear(pk_document_context(document));
  }
  return node;
}

/* A number spreads once; all of a group spread in one way. */
static picket_status check_against(picket_context *context, const pk_document *document,
                                   const pk_spread *spread, int i) {
  const pk_spread *own = &spread[i];
  for (int k = 0; k < i; k++) {
    if (number_of(document, own) == number_of(document, &spread[k])) {
      return pk_fail_at(context, PICKET_ERROR_INPUT, own->place,
                        "tolerance.spreads.%d varies \"%s\" again, must be another number", i,
                        own->vary);
    }
    if (own->group && spread[k].group && strcmp(own->group, spread[k].group) == 0 &&
        own->normal != spread[k].normal) {
      return pk_fail_at(context, PICKET_ERROR_INPUT, own->place,
                        "tolerance.spreads.%d is %s and of the group \"%s\", whose first one is "
                        "%s; all of a group must be of one kind",
                        i, own->normal ? "normal" : "a range", own->group,
                        own->normal ? "a range" : "normal");
    }
  }
  return PICKET_OK;
}

static picket_status read_spreads(const pk_reader *reader, const pk_document *document,
                                  const pk_node *list, pk_tolerance_block *block) {
  picket_context *context = reader->context;
  int deviate_of[PK_SPREADS];
  picket_status status = pk_read_list(context, list, 1, PK_SPREADS, "spreads");
  if (status != PICKET_OK) {
    return status;
  }
  block->spread = PK_NEW(context, list->count, pk_spread);
  if (!block->spread) {
    return PICKET_ERROR_MEMORY;
  }
  block->count = list->count;
  const pk_node *node = list->first;
  for (int i = 0; i < list->count && status == PICKET_OK; i++, node = node->next) {
    status = read_spread(reader, document, node, &block->spread[i]);
    if (status == PICKET_OK) {
      status = check_against(context, document, block->spread, i);
    }
  }
  if (status == PICKET_OK) {
    int deviates = pk_spread_deviates(block->count, block->spread, deviate_of);
    if (deviates > PK_DEVIATES) {
      status = pk_fail_at(context, PICKET_ERROR_INPUT, list->place,
                          "%s has %d independent spreads, must have at most %d; spreads of one "
                          "\"group\" count once",
                          pk_node_path(list).text, deviates, PK_DEVIATES);
    }
  }
  return status;
}

/* --- What is required ---------------------------------------------------------------------------
 */

enum { REQUIRE_QUANTITY, REQUIRE_LEAST, REQUIRE_MOST, REQUIRE_BETWEEN, REQUIRE_AT, REQUIRE_KEYS };
static const pk_key require_keys[REQUIRE_KEYS] = {
    [REQUIRE_QUANTITY] = {"quantity", true}, [REQUIRE_LEAST] = {"at_least", false},
    [REQUIRE_MOST] = {"at_most", false},     [REQUIRE_BETWEEN] = {"between", false},
    [REQUIRE_AT] = {"at_nm", false},
};

static picket_status read_limits(picket_context *context, const pk_node *block,
                                 const pk_node *const *values, pk_tolerance_block *out) {
  const pk_limits limits = {-LARGEST, LARGEST, false, false, false, ""};
  const pk_node *least = values[REQUIRE_LEAST], *most = values[REQUIRE_MOST];
  const pk_node *between = values[REQUIRE_BETWEEN];
  double both[2] = {-INFINITY, INFINITY};
  if ((least != NULL) + (most != NULL) + (between != NULL) != 1) {
    return pk_fail_at(context, PICKET_ERROR_INPUT, block->place,
                      "%s has %s, must have one of: at_least, at_most, between",
                      pk_node_path(block).text,
                      least || most || between ? "more than one limit" : "no limit");
  }
  picket_status status = PICKET_OK;
  if (between) {
    status = pk_read_numbers(context, between, &limits, 2, both);
  } else {
    status = pk_read_number(context, least ? least : most, &limits, &both[least ? 0 : 1]);
  }
  if (status == PICKET_OK && !(both[0] < both[1])) {
    status = pk_fail_at(context, PICKET_ERROR_INPUT, between->place,
                        "%s is [%.10g, %.10g], must be two rising numbers",
                        pk_node_path(between).text, both[0], both[1]);
  }
  out->least = both[0];
  out->most = both[1];
  return status;
}

static picket_status read_require(picket_context *context, const pk_node *node,
                                  pk_tolerance_block *out) {
  const pk_node *values[REQUIRE_KEYS];
  picket_status status = pk_read_block(context, node, require_keys, REQUIRE_KEYS, values);
  if (status == PICKET_OK) {
    out->place = values[REQUIRE_QUANTITY]->place;
    status = pk_read_measured(context, values[REQUIRE_QUANTITY], &out->quantity);
  }
  if (status == PICKET_OK) {
    status = read_limits(context, node, values, out);
  }
  return status == PICKET_OK
             ? pk_read_at(context, node, values[REQUIRE_AT], out->quantity, &out->at_um)
             : status;
}

/* --- The block ----------------------------------------------------------------------------------
 */

enum { KEY_SPREADS, KEY_REQUIRE, KEY_SAMPLES, KEY_SEED, KEY_DIRECT, KEY_FAMILY, KEY_COUNT };
static const pk_key keys[KEY_COUNT] = {
    [KEY_SPREADS] = {"spreads", true},        [KEY_REQUIRE] = {"require", true},
    [KEY_SAMPLES] = {"samples", false},       [KEY_SEED] = {"seed", false},
    [KEY_DIRECT] = {"direct_samples", false}, [KEY_FAMILY] = {"family", false},
};

static picket_status read_whole(picket_context *context, const pk_node *node, int low, int high,
                                int *out) {
  return node ? pk_read_whole(context, node, low, high, out) : PICKET_OK;
}

static picket_status read_counts(picket_context *context, const pk_node *const *values,
                                 pk_tolerance_block *block) {
  block->samples = USUAL_SAMPLES;
  block->seed = USUAL_SEED;
  block->direct = USUAL_DIRECT;
  picket_status status = read_whole(context, values[KEY_SAMPLES], 1, MOST_SAMPLES, &block->samples);
  if (status == PICKET_OK) {
    status = read_whole(context, values[KEY_SEED], 0, MOST_SEED, &block->seed);
  }
  return status == PICKET_OK
             ? read_whole(context, values[KEY_DIRECT], 0, MOST_DIRECT, &block->direct)
             : status;
}

picket_status pk_read_tolerance(pk_reader *reader, const pk_document *document,
                                const pk_node *node) {
  static const char *const families[] = {"te-like", "tm-like", "both"};
  pk_tolerance_block *block = &reader->problem->tolerance;
  const pk_node *values[KEY_COUNT];
  int family = 0;
  picket_status status = pk_read_block(reader->context, node, keys, KEY_COUNT, values);
  block->given = true;
  if (status == PICKET_OK) {
    status = read_spreads(reader, document, values[KEY_SPREADS], block);
  }
  if (status == PICKET_OK) {
    status = read_require(reader->context, values[KEY_REQUIRE], block);
  }
  if (status == PICKET_OK) {
    status = read_counts(reader->context, values, block);
  }
  if (status == PICKET_OK && values[KEY_FAMILY]) {
    status = pk_read_choice(reader->context, values[KEY_FAMILY], families, 3, &family);
  }
  block->family_given = values[KEY_FAMILY] != NULL;
  block->wanted[0] = family != 1;
  block->wanted[1] = family != 0;
  return status;
}
