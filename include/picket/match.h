/* What two guides that meet at a plane pass on, or a guide and a Gaussian beam. */
#ifndef PICKET_MATCH_H
#define PICKET_MATCH_H

#include <stddef.h>

#include <picket/options.h>
#include <picket/problem.h>
#include <picket/result.h>

#ifdef __cplusplus
extern "C" {
#endif

/* Of the E of a linearly polarized beam. */
typedef enum picket_match_along {
  PICKET_MATCH_ALONG_BEST = 0, /* whichever couples more */
  PICKET_MATCH_ALONG_X = 1,
  PICKET_MATCH_ALONG_Y = 2
} picket_match_along;

/* Fill with picket_match_request_init, then change what you need. */
typedef struct picket_match_request {
  size_t size; /* sizeof(picket_match_request), set by the init function */
  int mode;    /* order of the mode of the first section, by falling index from 0; 0 to 199 */
  int mode_b;  /* of the second section; -1 (default): of its two modes of highest index (the two
                  polarizations of a fibre) the one that couples more */
  /* The beam: its mode-field diameters along x and y, 1/e² of the intensity, above 0 and at most
   * 1000 µm; both 0 (default): the other side is a second section. Its front is flat at the plane.
   */
  double gaussian_x_um, gaussian_y_um;
  picket_match_along along;
  double medium_index; /* of the medium the beam comes from, for its tilt, 1 to 10; 0 (default):
                          that of the section far up and to the right, its cladding */
  int offset_given;    /* 0 (default): the centres are where the files put them, and the best offset
                          is sought too */
  double offset_x_um, offset_y_um; /* the other side against the first, -1000 to 1000 */
  double tilt_x_rad, tilt_y_rad;   /* the other side leans towards +x, +y; -π/6 to π/6 */
} picket_match_request;

/* Defaults. Null is ignored. */
PICKET_EXPORT void picket_match_request_init(picket_match_request *request);

/* The same for a struct of `size` bytes, that of the headers the program was compiled with: what
 * the macro calls, so that a program never has more written than it has room for. */
PICKET_EXPORT void picket_match_request_init_sized(picket_match_request *request, size_t size);
#define picket_match_request_init(request) \
  picket_match_request_init_sized((request), sizeof(picket_match_request))

/* Share of the power, and the same as 10 log10; at an offset. */
typedef struct picket_coupling {
  picket_quantity share;    /* 0 to 1 */
  picket_quantity share_db; /* 0 or less; missing where nothing is coupled */
  picket_quantity offset_x_um, offset_y_um;
} picket_coupling;

typedef struct picket_match_point {
  double wavelength_um;
  picket_coupling coupling; /* at the offset given, or none */
  picket_coupling best;     /* at the best offset; missing if one was given */
  picket_quantity index;    /* of the first section's mode */
  picket_quantity index_b;  /* of the second's; missing for a beam */
  int mode_b;               /* the one taken; -1 for a beam */
  picket_match_along along; /* of the beam taken; BEST for a section */
  const char *note;         /* why the point has no numbers; null otherwise */
} picket_match_point;

typedef struct picket_match_answer {
  picket_match_request request; /* what was asked */
  const char *with;             /* name of the second problem, null for a beam; borrowed */
  int point_count;
  const picket_match_point *points; /* borrowed from the result */
} picket_match_answer;

/* Which part of the power of a Gaussian beam, or of a mode of a second section, goes into a mode of
 * the problem's `section`, at each wavelength of its `light`:
 *
 *   η = Re[ ∫(E_1 × H_2*)_z ∫(E_2 × H_1*)_z / ∫(E_1 × H_1*)_z ] / Re ∫(E_2 × H_2*)_z
 *
 * Not included: reflection where the two meet (also that of a facet), and waves that go back and
 * forth. A tilt is the phase it makes at the plane, without the shortening of the field by its
 * cosine. A beam much narrower than a wavelength is none; where the formula exceeds 1 the share is
 * cut to 1 and its bar is missing.
 *
 *   problem    with `section` and `light`
 *   other      with `section`, of the same context; null with a beam. May be `problem`
 *   request    null: the defaults, which need `other`
 *
 * Grids are refined until the bar of the share is below options->accuracy, taken as a share of all
 * power; picket_result_complete is false if it is not reached.
 *
 * PICKET_ERROR_ARGUMENT for a request out of range, PICKET_ERROR_INPUT without section or
 * wavelengths or if there is no such mode at any wavelength, else as picket_modes_find. Cost per
 * wavelength: as picket_modes_find for one family of modes of each section, and some hundred
 * overlaps on each grid for the best offset. */
PICKET_EXPORT picket_status picket_match_find(picket_problem *problem, picket_problem *other,
                                              const picket_match_request *request,
                                              const picket_options *options, picket_result **out);

/* 1 for a result of picket_match_find; 0 for another kind of result. */
PICKET_EXPORT int picket_match_count(const picket_result *result);

/* PICKET_ERROR_ARGUMENT if i or the kind of result is wrong; `out` is then untouched. */
PICKET_EXPORT picket_status picket_match_get(const picket_result *result, int i,
                                             picket_match_answer *out);

#ifdef __cplusplus
}
#endif

#endif
