/* Inside of a section: sites of the staggered grid and the permittivities there. */
#ifndef PK_SECTION_SECTION_PRIVATE_H
#define PK_SECTION_SECTION_PRIVATE_H

#include "operator/corner_cache.h"
#include "operator/corner_list.h"
#include "operator/mixture.h"
#include "section/section.h"

/* Numbers of one kind of site for every site: [count]; -1 at sites that do not exist. Sites are
 * counted over intervals or lines that carry unknowns, y fastest. */
typedef struct pk_sites {
  double complex *x;  /* [mx*ny] ε_xx where E_x lies */
  double complex *y;  /* [nx*my] ε_yy where E_y lies */
  double complex *z;  /* [nx*ny] ε_zz where E_z lies */
  double complex *xy; /* [nx*ny] ε_xy at the nodes; used where mixed[] is not -1 */
} pk_sites;

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

/* Neighbours along an axis, by number of unknown line: -1 where there is none. */
int pk_line_index(const pk_axis *axis, int line);
int pk_interval_below(const pk_axis *axis, int index);
int pk_interval_above(const pk_axis *axis, int index);

picket_status pk_sites_create(const pk_section *section, pk_sites *out);
void pk_sites_free(const pk_section *section, pk_sites *sites);

/* Averages of given permittivities [3][media] at every site, corner corrections included. */
picket_status pk_sites_fill(pk_section *section, const double complex *permittivity,
                            pk_sites *sites);

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
