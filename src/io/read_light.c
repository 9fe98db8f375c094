/* light: the operating wavelengths and the polarization. Wavelengths between `from` and `to` are
 * evenly spaced in wavelength. See read.h. */
#include "base/memory.h"
#include "io/read.h"

enum { MOST_WAVELENGTHS = 10000 }; /* each one costs at least one solve */

enum { KEY_WAVELENGTH, KEY_POLARIZATION, KEY_COUNT };
static const pk_key keys[KEY_COUNT] = {
    [KEY_WAVELENGTH] = {"wavelength_nm", false},
    [KEY_POLARIZATION] = {"polarization", false},
};

enum { RANGE_FROM, RANGE_TO, RANGE_POINTS, RANGE_COUNT };
static const pk_key range_keys[RANGE_COUNT] = {
    [RANGE_FROM] = {"from", true},
    [RANGE_TO] = {"to", true},
    [RANGE_POINTS] = {"points", true},
};

static picket_status read_wavelength(picket_context *context, const pk_node *node, double *nm) {
  const pk_limits limits = {PK_WAVELENGTH_LOW_NM, PK_WAVELENGTH_HIGH_NM, false, false, false, "nm"};
  return pk_read_number(context, node, &limits, nm);
}

static picket_status read_list(picket_context *context, const pk_node *node, double *um) {
  double before = 0;
  int i = 0;
  for (const pk_node *child = node->first; child; child = child->next) {
    double nm = 0;
    picket_status status = read_wavelength(context, child, &nm);
    if (status != PICKET_OK) {
      return status;
    }
    if (nm <= before) {
      return pk_fail_at(context, PICKET_ERROR_INPUT, child->place,
                        "%s is %s nm, must be above the %.10g nm before it",
                        pk_node_path(child).text, child->text, before);
    }
    before = nm;
    um[i++] = nm / PK_NM_PER_UM;
  }
  return PICKET_OK;
}

typedef struct range {
  double from, to;
  int points;
} range;

static picket_status read_range(picket_context *context, const pk_node *node, range *r) {
  const pk_node *values[RANGE_COUNT];
  picket_status status = pk_read_block(context, node, range_keys, RANGE_COUNT, values);
  if (status == PICKET_OK) {
    status = read_wavelength(context, values[RANGE_FROM], &r->from);
  }
  if (status == PICKET_OK) {
    status = read_wavelength(context, values[RANGE_TO], &r->to);
  }
  if (status == PICKET_OK) {
    status = pk_read_whole(context, values[RANGE_POINTS], 1, MOST_WAVELENGTHS, &r->points);
  }
  if (status != PICKET_OK) {
    return status;
  }
  if (r->from > r->to) {
    return pk_fail_at(context, PICKET_ERROR_INPUT, values[RANGE_TO]->place,
                      "%s is %.10g nm, must be above \"from\", %.10g nm",
                      pk_node_path(values[RANGE_TO]).text, r->to, r->from);
  }
  if ((r->points == 1) != (r->from == r->to)) {
    return pk_fail_at(context, PICKET_ERROR_INPUT, values[RANGE_POINTS]->place,
                      "%s is %d, must be %s", pk_node_path(values[RANGE_POINTS]).text, r->points,
                      r->points == 1 ? "at least 2 between different wavelengths"
                                     : "1 between equal wavelengths");
  }
  return PICKET_OK;
}

static void fill_range(const range *r, double *um) {
  for (int i = 0; i < r->points; i++) {
    double t = r->points > 1 ? (double)i / (r->points - 1) : 0;
    um[i] = (i == r->points - 1 ? r->to : r->from + t * (r->to - r->from)) / PK_NM_PER_UM;
  }
}

static picket_status read_wavelengths(picket_context *context, const pk_node *node,
                                      pk_light *light) {
  range r = {0, 0, 1};
  picket_status status = PICKET_OK;
  if (node->kind == PK_NODE_MAP) {
    status = read_range(context, node, &r);
  } else if (node->kind == PK_NODE_LIST) {
    status = pk_read_list(context, node, 1, MOST_WAVELENGTHS, "wavelengths");
    r.points = node->count;
  } else {
    status = read_wavelength(context, node, &r.from);
    r.to = r.from;
  }
  if (status != PICKET_OK) {
    return status;
  }
  light->wavelength_um = PK_NEW(context, r.points, double);
  if (!light->wavelength_um) {
    return PICKET_ERROR_MEMORY;
  }
  light->count = r.points;
  if (node->kind == PK_NODE_LIST) {
    return read_list(context, node, light->wavelength_um);
  }
  fill_range(&r, light->wavelength_um);
  return PICKET_OK;
}

picket_status pk_read_light(pk_reader *reader, const pk_node *node) {
  static const char *const words[] = {"hy", "ey", "both"};
  pk_light *light = &reader->problem->light;
  const pk_node *values[KEY_COUNT];
  int choice = 2;
  picket_status status = pk_read_block(reader->context, node, keys, KEY_COUNT, values);
  if (status == PICKET_OK && values[KEY_WAVELENGTH]) {
    status = read_wavelengths(reader->context, values[KEY_WAVELENGTH], light);
  }
  if (status == PICKET_OK && values[KEY_POLARIZATION]) {
    status = pk_read_choice(reader->context, values[KEY_POLARIZATION], words, 3, &choice);
  }
  light->given = true;
  light->place = node->place;
  light->wanted[PK_HY] = choice != 1;
  light->wanted[PK_EY] = choice != 0;
  return status;
}
