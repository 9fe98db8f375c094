/* The field of a Bloch mode over one pitch of a cell, on the nodes of a grid.
 *
 * Conventions: fields go as exp(-iωt); z runs along the guide, x across it, y out of the drawing,
 * and (z, x, y) are right-handed. Stored is the periodic part: the field at (z, x) is component(z,
 * x) × exp(i k z),  k = 2π index / wavelength,  z from -pitch/2, so k with an imaginary part decays
 * towards +z, and the line z = pitch/2, which is among the lines, repeats the one at -pitch/2.
 *
 * E is in V/m and H in A/m. A mode that propagates carries 1 W towards +z per metre of height (y):
 * ½ ∫ Re(E × H*)_z dx, averaged over a pitch, between x_from_um and x_to_um; 1 W/m² where nothing
 * varies along x. One that does not (inside a stop band) is scaled so that its largest stored value
 * is 1. The value of E_y or H_y that is largest is real and positive.
 *
 * The mode is solved on one grid, with no bar: the unknown (ey: E_y, hy: H_y) is second-order
 * accurate in the spacing, less so within a few spacings of a corner, where E is singular. The
 * other components come from its differences, as the scheme has them between the nodes, and are
 * interpolated to the nodes. On an interface the component of E normal to it jumps, and its mean of
 * both sides is stored. */
#ifndef PICKET_FIELD_H
#define PICKET_FIELD_H

#include <stdbool.h>
#include <stddef.h>

#include <picket/options.h>
#include <picket/problem.h>
#include <picket/result.h>

#ifdef __cplusplus
extern "C" {
#endif

typedef struct picket_field picket_field;

typedef enum picket_axis { PICKET_AXIS_Z = 0, PICKET_AXIS_X = 1, PICKET_AXIS_Y = 2 } picket_axis;

typedef enum picket_component {
  PICKET_COMPONENT_EX = 0,
  PICKET_COMPONENT_EY = 1,
  PICKET_COMPONENT_EZ = 2,
  PICKET_COMPONENT_HX = 3,
  PICKET_COMPONENT_HY = 4,
  PICKET_COMPONENT_HZ = 5
} picket_component;

/* What a field is of. */
typedef struct picket_field_description {
  picket_polarization polarization;
  int order;            /* lateral nodes at this wavelength: 0 is the fundamental mode */
  double wavelength_um; /* in vacuum */
  double pitch_um;
  double index_re,
      index_im;    /* the Bloch index k/k0 on this grid; for one with a bar, see index.h */
  bool propagates; /* false: scaled to a largest value of 1 instead of unit power */
  double x_from_um, x_to_um; /* lines outside lie in absorbing layers, where the field is not that
                                of the cell; the first and last line if there are none */
} picket_field_description;

/* The mode of a cell at a wavelength.
 *   options        null for the defaults. `accuracy` chooses the grid: 16 steps per pitch from 1e-3
 *                  up, 32 at the default, 64 below 1e-4 (stacks: three times as many), fewer where
 *                  `unknowns` does not allow them; `count` and `jobs` say nothing here
 *   wavelength_um  above 0; need not be one of the problem's
 *   order          0 to 199
 *   out            receives the field, yours to free
 * PICKET_ERROR_NO_MODE if the cell has no mode of that order there, PICKET_ERROR_INPUT if the
 * problem is wrong or has no cell, PICKET_ERROR_ARGUMENT, PICKET_ERROR_RANGE, PICKET_ERROR_NUMERIC,
 * PICKET_ERROR_UNSUPPORTED for a lateral shift, PICKET_ERROR_MEMORY, PICKET_ERROR_STOPPED.
 * Cost: one reduction of a coarse cell to a column and a few factorisations. */
PICKET_EXPORT picket_status picket_field_find(picket_problem *problem,
                                              const picket_options *options,
                                              picket_polarization polarization,
                                              double wavelength_um, int order, picket_field **out);

/* Below: PICKET_ERROR_ARGUMENT if the field or an output is null, a name is none of its list, or
 * `capacity` is too small; outputs are then untouched. */

PICKET_EXPORT picket_status picket_field_describe(const picket_field *field,
                                                  picket_field_description *out);

/* Lines along z and x, both ends of the cell among them; nx is 1 where nothing varies along x. */
PICKET_EXPORT picket_status picket_field_size(const picket_field *field, int *nz, int *nx);

/* The coordinates of the lines of an axis, µm, rising.
 *   out       caller's buffer, [nz] or [nx]
 *   capacity  doubles available in out */
PICKET_EXPORT picket_status picket_field_lines(const picket_field *field, picket_axis axis,
                                               double *out, size_t capacity);

/* The periodic part of a component; zeros for one that the polarization does not have.
 *   out       caller's buffer, [nz][nx][2]: x before z, real before imaginary parts fastest
 *   capacity  doubles available in out, at least 2 nz nx */
PICKET_EXPORT picket_status picket_field_component(const picket_field *field,
                                                   picket_component which, double *out,
                                                   size_t capacity);

/* The permittivity (relative, complex), averaged over the cell around each node; same layout. */
PICKET_EXPORT picket_status picket_field_permittivity(const picket_field *field, double *out,
                                                      size_t capacity);

/* "Ex" to "Hz"; "V/m" or "A/m". Static text; null for any other number. */
PICKET_EXPORT const char *picket_component_name(picket_component which);
PICKET_EXPORT const char *picket_component_unit(picket_component which);

/* Lets go of a field; null is accepted. */
PICKET_EXPORT void picket_field_free(picket_field *field);

/* Writes the fields of every wavelength and polarization of the problem's `light`, of
 * `options->count` modes each (default 1), to an HDF5 file that names its own units and
 * conventions. Group /POLARIZATION/WAVELENGTHnm/modeORDER, e.g. /hy/1550nm/mode0, holds the
 * components and `permittivity` [nz][nx] (complex numbers as compounds {r, i}) and `z_um`, `x_um`.
 * A wavelength without a mode has a group with the attribute `note`. Orders count lateral nodes at
 * each wavelength for itself. The same problem gives the same bytes.
 *   path  file name; the file appears when it is whole, in the place of one of that name
 * PICKET_ERROR_OUTPUT if it cannot be written, known before the work begins as far as possible;
 * PICKET_ERROR_INPUT without a cell or wavelengths; else as picket_field_find, if no field at all
 * could be had. No file is left behind by a failure. Cost: as picket_field_find for each wavelength
 * and polarization; the file is put together in memory, 64 bytes for each node of each mode. */
PICKET_EXPORT picket_status picket_fields_write(picket_problem *problem,
                                                const picket_options *options, const char *path);

#ifdef __cplusplus
}
#endif

#endif
