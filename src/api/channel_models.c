/* See channel_models.h. The lines of all slices cut the plane across the guide into columns and
 * boxes. For the cell each column of each slice is a stack of films along y, whose effective index
 * takes its place; for the section each box is a stack of layers along z, whose second-order
 * average takes its place. */
#include "api/channel_models.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

#include "base/memory.h"
#include "study/section_planes.h"

static const double NM_PER_UM = 1000;
enum { TEXT_BYTES = 8192, NAME_BYTES = 64, MOST_LINES = 64 };
static const double BEYOND_UM = 1; /* outside the outermost lines nothing changes */

typedef struct model {
  const pk_problem *problem;
  const pk_channel_block *channel;
  pk_document *document;
  int count[2]; /* lines along x and y */
  double line[2][MOST_LINES];
  int shapes, materials;
} model;

static picket_status take_lines(model *m) {
  picket_context *context = m->problem->context;
  picket_status status = PICKET_OK;
  for (int axis = 0; status == PICKET_OK && axis < 2; axis++) {
    double *all = NULL;
    int found = 0;
    status = pk_planes_lines(context, &m->channel->outline, axis, &all, &found);
    for (int i = 0; status == PICKET_OK && i < found; i++) {
      int n = m->count[axis];
      bool same = n > 0 && all[i] - m->line[axis][n - 1] < PK_SAME_LINE_UM;
      if (!same && n == MOST_LINES) {
        status = pk_fail(context, PICKET_ERROR_UNSUPPORTED,
                         "the channel has more than %d lines along an axis, allowed for its "
                         "two-dimensional models are at most %d",
                         MOST_LINES, MOST_LINES);
      } else if (!same) {
        m->line[axis][m->count[axis]++] = all[i];
      }
    }
    pk_free(context, all);
  }
  return status;
}

static picket_status open_model(const pk_problem *problem, pk_document *document, model *m) {
  *m = (model){.problem = problem, .channel = &problem->channel, .document = document};
  if (!pk_planes_are_rectangular(&m->channel->outline)) {
    return pk_fail(problem->context, PICKET_ERROR_UNSUPPORTED,
                   "the channel has curved or oblique shapes, for which its two-dimensional models "
                   "are not built");
  }
  return take_lines(m);
}

/* The middle of interval i of an axis: 0 lies below all lines. */
static double middle(const model *m, int axis, int i) {
  int n = m->count[axis];
  const double *line = m->line[axis];
  if (n == 0) {
    return 0;
  }
  return i == 0   ? line[0] - BEYOND_UM
         : i == n ? line[n - 1] + BEYOND_UM
                  : 0.5 * (line[i - 1] + line[i]);
}

static int medium(const model *m, int slice, int i, int j) {
  return pk_geometry_medium_at(m->channel->slice[slice], middle(m, 0, i), middle(m, 1, j));
}

static const char *name_of(const model *m, int material) {
  return pk_materials_name(m->problem->materials, material);
}

static double length_nm(const model *m, int slice) {
  return NM_PER_UM * (m->channel->from_um[slice + 1] - m->channel->from_um[slice]);
}

static picket_status set(const model *m, const char *path, const char *value) {
  return pk_document_set(m->document, "model", path, value);
}

static picket_status add_shape(model *m, const char *block, const char *value) {
  char path[NAME_BYTES];
  snprintf(path, sizeof path, "%s.shapes.%d", block, m->shapes++);
  return set(m, path, value);
}

static picket_status add_material(model *m, const char *value, char name[NAME_BYTES]) {
  char path[2 * NAME_BYTES];
  snprintf(name, NAME_BYTES, "model_part_%d", ++m->materials);
  snprintf(path, sizeof path, "materials.%s", name);
  return set(m, path, value);
}

/* Ends a list of films of so many bytes; one that does not fit is cut and refused when it is read.
 */
static void close_text(char text[TEXT_BYTES], int used) {
  int at = used < TEXT_BYTES - 4 ? used : TEXT_BYTES - 4;
  snprintf(text + at, (size_t)(TEXT_BYTES - at), "]}}");
}

/* --- The cell --------------------------------------------------------------------------------- */

/* The intervals along y around the shapes: what lies below `*first` and above `*last`, a substrate
 * that light would leak into, is not part of the slab. */
static void around_shapes(const model *m, int *first, int *last) {
  const pk_section_block *outline = &m->channel->outline;
  *first = 0;
  *last = m->count[1];
  while (*first < m->count[1] && m->line[1][*first] < outline->low_um[1] - PK_SAME_LINE_UM) {
    ++*first;
  }
  while (*last > *first && m->line[1][*last - 1] > outline->high_um[1] + PK_SAME_LINE_UM) {
    --*last;
  }
}

/* The material that stands for column i of a slice. */
static picket_status column(model *m, int slice, int i, bool te, char name[NAME_BYTES]) {
  char text[TEXT_BYTES];
  int first = 0, last = 0, used = 0;
  bool same = true;
  around_shapes(m, &first, &last);
  for (int j = first + 1; j <= last; j++) {
    same = same && medium(m, slice, i, j) == medium(m, slice, i, first);
  }
  if (same) {
    snprintf(name, NAME_BYTES, "%s", name_of(m, medium(m, slice, i, first)));
    return PICKET_OK;
  }
  used += snprintf(text, sizeof text,
                   "{slab: {substrate: \"%s\", cover: \"%s\", polarization: %s, films: [",
                   name_of(m, medium(m, slice, i, first)), name_of(m, medium(m, slice, i, last)),
                   te ? "te" : "tm");
  for (int j = first + 1; j < last && used < TEXT_BYTES; j++) {
    used +=
        snprintf(text + used, sizeof text - (size_t)used, "%s{fill: \"%s\", thickness_nm: %.15g}",
                 j > first + 1 ? ", " : "", name_of(m, medium(m, slice, i, j)),
                 NM_PER_UM * (m->line[1][j] - m->line[1][j - 1]));
  }
  close_text(text, used);
  return add_material(m, text, name);
}

static picket_status cell_shapes(model *m, bool te, const char *cladding) {
  picket_status status = PICKET_OK;
  for (int s = 0; s < m->channel->slices; s++) {
    for (int i = 1; status == PICKET_OK && i < m->count[0]; i++) {
      char name[NAME_BYTES], text[TEXT_BYTES];
      double low = NM_PER_UM * m->line[0][i - 1], high = NM_PER_UM * m->line[0][i];
      status = column(m, s, i, te, name);
      snprintf(text, sizeof text,
               "{rect: {fill: \"%s\", length_nm: %.15g, width_nm: %.15g, at_nm: [%.15g, %.15g]}}",
               name, length_nm(m, s), high - low,
               NM_PER_UM * m->channel->from_um[s] + 0.5 * length_nm(m, s), 0.5 * (low + high));
      if (status == PICKET_OK && strcmp(name, cladding) != 0) {
        status = add_shape(m, "cell", text);
      }
    }
  }
  return status;
}

picket_status pk_channel_model_cell(const pk_problem *problem, pk_polarization polarization,
                                    pk_document *document) {
  model m;
  char cladding[NAME_BYTES], text[TEXT_BYTES];
  const bool te = polarization == PK_HY;
  picket_status status = open_model(problem, document, &m);
  if (status == PICKET_OK) {
    status = column(&m, 0, 0, te, cladding);
  }
  if (status == PICKET_OK) {
    snprintf(text, sizeof text, "{pitch_nm: %.15g, cladding: \"%s\", lateral: open, shapes: []}",
             NM_PER_UM * m.channel->pitch_um, cladding);
    status = set(&m, "cell", text);
  }
  return status == PICKET_OK ? cell_shapes(&m, te, cladding) : status;
}

/* --- The section ------------------------------------------------------------------------------ */

/* The material that stands for box (i, j). */
static picket_status box(model *m, int i, int j, char name[NAME_BYTES]) {
  char text[TEXT_BYTES];
  int used = 0;
  bool same = true;
  for (int s = 1; s < m->channel->slices; s++) {
    same = same && medium(m, s, i, j) == medium(m, 0, i, j);
  }
  if (same) {
    snprintf(name, NAME_BYTES, "%s", name_of(m, medium(m, 0, i, j)));
    return PICKET_OK;
  }
  used += snprintf(text, sizeof text, "{layered: {films: [");
  for (int s = 0; s < m->channel->slices && used < TEXT_BYTES; s++) {
    used +=
        snprintf(text + used, sizeof text - (size_t)used, "%s{fill: \"%s\", thickness_nm: %.15g}",
                 s > 0 ? ", " : "", name_of(m, medium(m, s, i, j)), length_nm(m, s));
  }
  close_text(text, used);
  return add_material(m, text, name);
}

/* What lies at the sides goes across the whole width first. */
static picket_status section_stripes(model *m) {
  picket_status status = PICKET_OK;
  for (int j = 0; status == PICKET_OK && j <= m->count[1]; j++) {
    char text[TEXT_BYTES], from[NAME_BYTES] = "-.inf", to[NAME_BYTES] = ".inf";
    int material = medium(m, 0, 0, j);
    if (j > 0) {
      snprintf(from, sizeof from, "%.15g", NM_PER_UM * m->line[1][j - 1]);
    }
    if (j < m->count[1]) {
      snprintf(to, sizeof to, "%.15g", NM_PER_UM * m->line[1][j]);
    }
    snprintf(text, sizeof text, "{stripe: {fill: \"%s\", across: y, from_nm: %s, to_nm: %s}}",
             name_of(m, material), from, to);
    status = material == m->channel->cladding ? PICKET_OK : add_shape(m, "section", text);
  }
  return status;
}

static picket_status section_boxes(model *m) {
  picket_status status = PICKET_OK;
  for (int i = 1; status == PICKET_OK && i < m->count[0]; i++) {
    for (int j = 1; status == PICKET_OK && j < m->count[1]; j++) {
      char name[NAME_BYTES], text[TEXT_BYTES];
      const double *x = &m->line[0][i - 1], *y = &m->line[1][j - 1];
      status = box(m, i, j, name);
      snprintf(text, sizeof text,
               "{rect: {fill: \"%s\", width_nm: %.15g, height_nm: %.15g, at_nm: [%.15g, %.15g]}}",
               name, NM_PER_UM * (x[1] - x[0]), NM_PER_UM * (y[1] - y[0]),
               NM_PER_UM * 0.5 * (x[0] + x[1]), NM_PER_UM * 0.5 * (y[0] + y[1]));
      if (status == PICKET_OK && strcmp(name, name_of(m, medium(m, 0, 0, j))) != 0) {
        status = add_shape(m, "section", text);
      }
    }
  }
  return status;
}

picket_status pk_channel_model_section(const pk_problem *problem, pk_document *document) {
  model m;
  char text[TEXT_BYTES];
  picket_status status = open_model(problem, document, &m);
  if (status == PICKET_OK) {
    snprintf(text, sizeof text, "{cladding: \"%s\", shapes: []}", name_of(&m, m.channel->cladding));
    status = set(&m, "section", text);
  }
  if (status == PICKET_OK) {
    status = section_stripes(&m);
  }
  return status == PICKET_OK ? section_boxes(&m) : status;
}
