/* The field of a mode of a section, on the staggered grid that it was solved on.
 *
 * Conventions: fields go as exp(i(βz - ωt)), x across, y up, z along the guide; (x, y, z) are
 * right-handed. The field at (x, y, z) is component(x, y) × exp(i 2π index z / wavelength). E is in
 * V/m and H in A/m. A mode carries 1 W towards +z: ½ ∫ Re(E × H*)_z dx dy between x_from_um,
 * x_to_um and y_from_um, y_to_um. The value of E_x or E_y that is largest is real and positive.
 *
 * Every component has places of its own (K. S. Yee, IEEE Trans. Antennas Propag. 14, 302 (1966)):
 * along each axis on the lines of the grid, on which interfaces lie, or in the middles between
 * them,
 *
 *   E_z (line, line);  E_x, H_y (middle, line);  E_y, H_x (line, middle);  H_z (middle, middle),
 *
 * so each component of E is tangential to the interfaces that it lies on and is one number there.
 * The window is the whole one: parts on the other side of mirror planes are there too.
 *
 * The mode is solved on one grid, with no bar: second-order accurate in the spacing, less so within
 * a few spacings of a corner, where E is singular. */
#ifndef PICKET_SECTION_FIELD_H
#define PICKET_SECTION_FIELD_H

#include <stddef.h>

#include <picket/field.h>

#ifdef __cplusplus
extern "C" {
#endif

typedef struct picket_section_field picket_section_field;

/* What a field is of. */
typedef struct picket_section_field_description {
  int order;                 /* by falling index on this grid, from 0 */
  double wavelength_um;      /* in vacuum */
  double index_re, index_im; /* β/k0 on this grid; for one with a bar, see modes.h */
  double x_from_um, x_to_um;
  double y_from_um, y_to_um; /* outside of these lie absorbing layers, where the field is not that
                                of the section; the whole window if there are none */
} picket_section_field_description;

/* The mode of the problem's section at a wavelength.
 *   options        null for the defaults. `accuracy` chooses the grid: the member 2 of its family
 *                  from 1e-3 up, 4 at the default, 8 below 1e-4, fewer where `unknowns` does not
 *                  allow them; `count` and `jobs` say nothing here
 *   wavelength_um  above 0; need not be one of the problem's
 *   order          0 to 199
 *   out            receives the field, yours to free
 * PICKET_ERROR_NO_MODE if the section guides no mode of that order there, PICKET_ERROR_INPUT if the
 * problem is wrong or has no section, PICKET_ERROR_ARGUMENT, PICKET_ERROR_RANGE,
 * PICKET_ERROR_NUMERIC, PICKET_ERROR_UNSUPPORTED for a bent section, PICKET_ERROR_MEMORY,
 * PICKET_ERROR_STOPPED. Cost: one factorisation of a coarse and one of a fine grid for each family
 * of modes. */
PICKET_EXPORT picket_status picket_section_field_find(picket_problem *problem,
                                                      const picket_options *options,
                                                      double wavelength_um, int order,
                                                      picket_section_field **out);

/* Below: PICKET_ERROR_ARGUMENT if the field or an output is null, a name is none of its list, or
 * `capacity` is too small; outputs are then untouched. */

PICKET_EXPORT picket_status picket_section_field_describe(const picket_section_field *field,
                                                          picket_section_field_description *out);

/* Places of a component along x and y. */
PICKET_EXPORT picket_status picket_section_field_size(const picket_section_field *field,
                                                      picket_component which, int *nx, int *ny);

/* The coordinates of the places of a component along an axis, µm, rising.
 *   axis      PICKET_AXIS_X or PICKET_AXIS_Y
 *   out       caller's buffer, [nx] or [ny]
 *   capacity  doubles available in out */
PICKET_EXPORT picket_status picket_section_field_places(const picket_section_field *field,
                                                        picket_component which, picket_axis axis,
                                                        double *out, size_t capacity);

/* The values of a component.
 *   out       caller's buffer, [nx][ny][2]: y before x, real before imaginary parts fastest
 *   capacity  doubles available in out, at least 2 nx ny */
PICKET_EXPORT picket_status picket_section_field_component(const picket_section_field *field,
                                                           picket_component which, double *out,
                                                           size_t capacity);

/* The permittivity (relative, complex) that the scheme has for E_x, E_y or E_z, at the places of
 * that component: its entry xx, yy or zz, averaged across interfaces and corrected at corners; same
 * layout. PICKET_ERROR_ARGUMENT for a component of H. */
PICKET_EXPORT picket_status picket_section_field_permittivity(const picket_section_field *field,
                                                              picket_component which, double *out,
                                                              size_t capacity);

/* Lets go of a field; null is accepted. */
PICKET_EXPORT void picket_section_field_free(picket_section_field *field);

/* Writes the fields of every wavelength of the problem's `light`, of `options->count` modes each
 * (0: all, up to 20), to an HDF5 file that names its own units and conventions. Group
 * /section/WAVELENGTHnm/modeORDER, e.g. /section/1550nm/mode0, holds Ex to Hz and permittivity_xx,
 * _yy and _zz (complex numbers as compounds {r, i}), and x_lines_um, x_middles_um, y_lines_um,
 * y_middles_um; the attribute `axes` of a component names the two that it lies on. A wavelength
 * without a mode has a group with the attribute `note`. The same problem gives the same bytes.
 *   path  file name; the file appears when it is whole, in the place of one of that name
 * PICKET_ERROR_OUTPUT if it cannot be written, known before the work begins as far as possible;
 * PICKET_ERROR_INPUT without a section or wavelengths; else as picket_section_field_find, if no
 * field at all could be had. No file is left behind by a failure. Cost: as
 * picket_section_field_find for each wavelength; the file is put together in memory, 144 bytes for
 * each node of each mode. */
PICKET_EXPORT picket_status picket_section_fields_write(picket_problem *problem,
                                                        const picket_options *options,
                                                        const char *path);

#ifdef __cplusplus
}
#endif

#endif
