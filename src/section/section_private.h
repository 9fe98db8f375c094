/* Inside of a section: sites of the staggered grid and the permittivities there. */
#ifndef PK_SECTION_SECTION_PRIVATE_H
#define PK_SECTION_SECTION_PRIVATE_H

#include "operator/corner_cache.h"
#include "operator/corner_list.h"
#include "operator/mixture.h"
#include "section/section.h"
#include "section/sites.h"

struct pk_section {
  picket_context *context;
  pk_axis x, y;
  int nx, ny; /* lines with unknowns */
  int mx, my; /* intervals */
  int hx_count;
  int64_t n;
  int media;
  bool real_axes, is_real;
  double complex *dual_x, *dual_y; /* [nx], [ny] stretched lengths between half lines */
  double *width_x, *width_y;       /* [nx], [ny] the same without stretch */
  double curvature;
  double complex *metric_line, *metric_middle; /* [nx], [mx] g at the lines and middles of x */
  pk_mixtures mixtures;
  int *mixture_x, *mixture_y, *mixture_z; /* of the sites */
  int *mixed;                             /* [nx*ny] mixture of an oblique node, or -1 */
  int corner_count;
  pk_grid_corner *corner; /* [corner_count] */
  pk_corner_cache *cures;
  double complex *permittivity; /* [3][media] of the last load */
  pk_sites sites;
  pk_pattern pattern;
};

/* Mixtures of the averaging boxes of every site. */
picket_status pk_section_average(pk_section *section, const pk_geometry *geometry);

/* g at a line or middle of the x axis without stretch. */
double pk_section_plain_metric(const pk_section *section, double x);

/* One row of T: columns may come several times; their values add up. */
enum { PK_ROW_TERMS = 64 };
typedef struct pk_row {
  int count;
  int64_t column[PK_ROW_TERMS];
  double complex value[PK_ROW_TERMS];
} pk_row;

void pk_section_row(const pk_section *section, double k0, int64_t row, pk_row *out);

#endif
