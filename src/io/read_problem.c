/* The problem file as a whole: its top-level keys. See read.h. */
#include <math.h>

#include "base/memory.h"
#include "io/read.h"

static const double ABSOLUTE_ZERO_C = -273.15;
static const double HOTTEST_C = 1000.0; /* above it the materials of a chip are no longer solid */
enum {
  NAME_BYTES = 200, /* a title, not a text */
  FORMAT = 1
};

/* Keys of a file. */
enum {
  KEY_FORMAT,
  KEY_NAME,
  KEY_LIGHT,
  KEY_TEMPERATURE,
  KEY_MATERIALS,
  KEY_CELL,
  KEY_PATH,
  KEY_SLAB,
  KEY_SECTION,
  KEY_CHANNEL,
  KEY_AIM,
  KEY_RULES,
  KEY_TOLERANCE,
  KEY_TAPER,
  KEY_COUNT
};
static const pk_key keys[KEY_COUNT] = {
    [KEY_FORMAT] = {"format", false},
    [KEY_NAME] = {"name", false},
    [KEY_LIGHT] = {"light", false},
    [KEY_TEMPERATURE] = {"temperature_c", false},
    [KEY_MATERIALS] = {"materials", false},
    [KEY_CELL] = {"cell", false},
    [KEY_PATH] = {"path", false},
    [KEY_SLAB] = {"slab", false},
    [KEY_SECTION] = {"section", false},
    [KEY_CHANNEL] = {"channel", false},
    [KEY_AIM] = {"aim", false},
    [KEY_RULES] = {"rules", false},
    [KEY_TOLERANCE] = {"tolerance", false},
    [KEY_TAPER] = {"taper", false},
};

static picket_status check_format(picket_context *context, const pk_node *root,
                                  const pk_node *node) {
  int format = 0;
  if (!node) {
    return pk_fail_at(context, PICKET_ERROR_INPUT, root->place,
                      "the file has no \"format\", must begin with \"format: 1\"");
  }
  return pk_read_whole(context, node, FORMAT, FORMAT, &format);
}

static picket_status read_name(pk_reader *reader, const pk_node *node) {
  const char *name = "";
  picket_status status = PICKET_OK;
  if (node) {
    status = pk_read_text(reader->context, node, NAME_BYTES, &name);
  }
  if (status == PICKET_OK) {
    reader->problem->name = pk_text_copy(reader->context, name);
    status = reader->problem->name ? PICKET_OK : PICKET_ERROR_MEMORY;
  }
  return status;
}

static picket_status read_temperature(pk_reader *reader, const pk_node *node) {
  const pk_limits limits = {ABSOLUTE_ZERO_C, HOTTEST_C, true, false, false, "degrees C"};
  return pk_read_number(reader->context, node, &limits, &reader->problem->temperature_c);
}

/* Blocks in the order in which they need each other. */
static picket_status read_blocks(pk_reader *reader, const pk_document *document,
                                 const pk_node *const *values) {
  picket_status status = read_name(reader, values[KEY_NAME]);
  if (status == PICKET_OK && values[KEY_LIGHT]) {
    status = pk_read_light(reader, values[KEY_LIGHT]);
  }
  if (status == PICKET_OK && values[KEY_TEMPERATURE]) {
    status = read_temperature(reader, values[KEY_TEMPERATURE]);
  }
  if (status == PICKET_OK) {
    status = pk_read_materials(reader);
  }
  if (status == PICKET_OK && values[KEY_CELL]) {
    status = pk_read_cell(reader, values[KEY_CELL]);
  }
  if (status == PICKET_OK && values[KEY_PATH]) {
    status = pk_read_path(reader, values[KEY_PATH]);
  }
  if (status == PICKET_OK && values[KEY_SLAB]) {
    status = pk_read_slab(reader, values[KEY_SLAB]);
  }
  if (status == PICKET_OK && values[KEY_SECTION]) {
    status = pk_read_section(reader, values[KEY_SECTION]);
  }
  if (status == PICKET_OK && values[KEY_CHANNEL]) {
    status = pk_read_channel(reader, values[KEY_CHANNEL]);
  }
  if (status == PICKET_OK && values[KEY_AIM]) {
    status = pk_read_aim(reader, document, values[KEY_AIM]);
  }
  if (status == PICKET_OK && values[KEY_TOLERANCE]) {
    status = pk_read_tolerance(reader, document, values[KEY_TOLERANCE]);
  }
  if (status == PICKET_OK && values[KEY_TAPER]) {
    status = pk_read_taper(reader, document, values[KEY_TAPER]);
  }
  if (status == PICKET_OK && values[KEY_RULES]) {
    status = pk_read_rules(reader, values[KEY_RULES]);
  }
  return status;
}

picket_status pk_problem_read(picket_context *context, const pk_document *document,
                              pk_problem **out) {
  const pk_node *root = pk_document_root(document);
  const pk_node *values[KEY_COUNT];
  picket_status status = pk_read_block(context, root, keys, KEY_COUNT, values);
  if (status == PICKET_OK) {
    status = check_format(context, root, values[KEY_FORMAT]);
  }
  if (status != PICKET_OK) {
    return status;
  }
  pk_problem *problem = PK_NEW(context, 1, pk_problem);
  if (!problem) {
    return PICKET_ERROR_MEMORY;
  }
  problem->context = pk_context_hold(context);
  problem->temperature_c = 20.0; /* the reference temperature of index data */
  problem->light.wanted[PK_EY] = problem->light.wanted[PK_HY] = true;
  problem->smallest_um = INFINITY;
  pk_reader reader = {context, pk_document_folder(document), values[KEY_MATERIALS], problem, false};
  status = read_blocks(&reader, document, values);
  if (status != PICKET_OK) {
    pk_problem_free(problem);
    return status;
  }
  *out = problem;
  return PICKET_OK;
}
