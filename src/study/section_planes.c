/* See section_planes.h. */
#include "study/section_planes.h"

#include <math.h>

#include "base/memory.h"

int pk_planes_count(const pk_section_block *block) {
  return 1 + block->others;
}

const pk_geometry *pk_planes_get(const pk_section_block *block, int i) {
  return i == 0 ? block->geometry : block->other[i - 1];
}

int pk_line_insert(double value, int count, double *line) {
  int at = count;
  while (at > 0 && line[at - 1] > value) {
    line[at] = line[at - 1];
    at--;
  }
  line[at] = value;
  return count + 1;
}

picket_status pk_planes_lines(picket_context *context, const pk_section_block *block, int axis,
                              double **out, int *count) {
  double *all = NULL;
  int total = 0;
  picket_status status = PICKET_OK;
  for (int i = 0; status == PICKET_OK && i < pk_planes_count(block); i++) {
    double *own = NULL;
    int found = 0;
    status = pk_geometry_lines(pk_planes_get(block, i), (pk_axis_name)axis, &own, &found);
    double *larger = status == PICKET_OK ? pk_regrow(context, all, (size_t)total,
                                                     (size_t)(total + found + 1), sizeof *larger)
                                         : NULL;
    status = status == PICKET_OK && !larger ? PICKET_ERROR_MEMORY : status;
    all = larger ? larger : all;
    for (int k = 0; status == PICKET_OK && k < found; k++) {
      total = pk_line_insert(own[k], total, all);
    }
    pk_free(context, own);
  }
  if (status != PICKET_OK) {
    pk_free(context, all);
    return status;
  }
  *out = all;
  *count = total;
  return PICKET_OK;
}

bool pk_planes_are_rectangular(const pk_section_block *block) {
  bool all = true;
  for (int i = 0; i < pk_planes_count(block); i++) {
    all = all && pk_geometry_is_rectangular(pk_planes_get(block, i));
  }
  return all;
}

/* Whether a plane varies along an axis, as far as it is rectangular. */
static picket_status varies(const pk_geometry *geometry, int axis, picket_context *context,
                            bool *out) {
  double *line = NULL;
  int count = 0;
  picket_status status = pk_geometry_lines(geometry, (pk_axis_name)axis, &line, &count);
  pk_free(context, line);
  *out = count > 0 || !pk_geometry_is_rectangular(geometry);
  return status;
}

/* Planes that do not vary along the axis have any mirror plane. */
picket_status pk_planes_mirror(picket_context *context, const pk_section_block *block, int axis,
                               bool *out, double *centre_out) {
  picket_status status = PICKET_OK;
  bool all = true, found = false;
  double centre = 0;
  for (int i = 0; status == PICKET_OK && i < pk_planes_count(block); i++) {
    double own = 0;
    bool any = false;
    status = varies(pk_planes_get(block, i), axis, context, &any);
    if (status == PICKET_OK && any) {
      all = all && pk_geometry_mirror(pk_planes_get(block, i), (pk_axis_name)axis, &own) &&
            (!found || fabs(own - centre) < PK_SAME_LINE_UM);
      centre = found ? centre : own;
      found = true;
    }
  }
  *out = all;
  *centre_out = centre;
  return status;
}
