/* Sites of the staggered grid of a section and the permittivities there, for the rooms that build
 * on it. */
#ifndef PK_SECTION_SITES_H
#define PK_SECTION_SITES_H

#include "section/section.h"

/* Numbers of one kind of site for every site. Sites are counted over intervals or lines that carry
 * unknowns, y fastest. */
typedef struct pk_sites {
  double complex *x;  /* [mx*ny] ε_xx where E_x lies */
  double complex *y;  /* [nx*my] ε_yy where E_y lies */
  double complex *z;  /* [nx*ny] ε_zz where E_z lies */
  double complex *xy; /* [nx*ny] ε_xy at the nodes; 0 where no interface is oblique */
} pk_sites;

/* Neighbours along an axis, by number of unknown line: -1 where there is none. */
int pk_line_index(const pk_axis *axis, int line);
int pk_interval_below(const pk_axis *axis, int index);
int pk_interval_above(const pk_axis *axis, int index);

picket_status pk_sites_create(const pk_section *section, pk_sites *out);
void pk_sites_free(const pk_section *section, pk_sites *sites);

/* Averages of given permittivities [3][media] at every site, corner corrections included. */
picket_status pk_sites_fill(pk_section *section, const double complex *permittivity,
                            pk_sites *sites);

/* Fingerprints of what the sites hold: sites of two sections with one mark have one value, whatever
 * the media. The grids must be the same. Order: x, y, z, xy sites; 0 for a node without oblique
 * interface. */
int pk_section_site_count(const pk_section *section);
void pk_section_marks(const pk_section *section, uint64_t *marks);

#endif
