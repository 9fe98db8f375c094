/* Full-vector modes of a section: a plane (x across, y up) that does not vary along z. */
#ifndef PICKET_MODES_H
#define PICKET_MODES_H

#include <picket/options.h>
#include <picket/problem.h>
#include <picket/result.h>

#ifdef __cplusplus
extern "C" {
#endif

/* Share of the electric energy ∫ε|E|² of a mode that is in a material. */
typedef struct picket_confinement {
  const char *material; /* its name; borrowed from the result */
  double share;         /* 0 to 1; the shares of a mode add up to 1 */
} picket_confinement;

/* Mode-field diameters, each by its own definition, all equal to 2w for a Gaussian beam with an
 * intensity as exp(-2r²/w²). S_z = ½ Re(E × H*)_z is the power flow, H_t the transverse magnetic
 * field. Missing (NaN, with a note) where a mode has none. */
typedef struct picket_mode_diameters {
  /* Petermann II: 2√(2 ∫|H_t|² / ∫|∇H_t|²), and along an axis 2√(∫|H_t|² / ∫|∂H_t|²): from the
   * spread of the far field (K. Petermann, Electron. Lett. 19, 712 (1983)). */
  picket_quantity petermann_um, petermann_x_um, petermann_y_um;
  /* 2√2 √⟨r²⟩ about the centroid of S_z, and along an axis 4σ. */
  picket_quantity rms_um, rms_x_um, rms_y_um;
  /* Between the outermost places on the line through the centroid of S_z along an axis where S_z
   * falls to 1/e² of its largest value on that line. */
  picket_quantity e2_x_um, e2_y_um;
  /* The Gaussian beam g about the centroid of S_z, polarized along x or y, that resembles the mode
   * most: the overlap |∫H_c g|² / (∫|H_t|² ∫g²), H_c across the beam's E, is largest. Round, then
   * with a diameter along x and one along y. */
  picket_quantity gaussian_um, gaussian_overlap;
  picket_quantity gaussian_x_um, gaussian_y_um, gaussian_xy_overlap;
} picket_mode_diameters;

typedef struct picket_section_mode {
  int order;                               /* by falling index, from 0 */
  picket_quantity index;                   /* Re β/k0 */
  picket_quantity group_index;             /* dβ/dk0, material dispersion included */
  picket_quantity loss_db_per_cm;          /* of power, from Im β: absorption and leakage */
  picket_quantity bend_loss_db_per_90_deg; /* loss_db_per_cm over a quarter turn; missing (NaN,
                                              without a note) where the section is straight */
  picket_quantity effective_area_um2;      /* (∫S_z dA)² / ∫S_z² dA */
  picket_mode_diameters diameters;
  double ex_share; /* of the transverse electric energy ∫ε(|E_x|² + |E_y|²), that along x; 1 is a
                      te-like mode of a flat guide, 0 a tm-like one. From the finest grid, as are
                      the numbers below */
  int nodes_x, nodes_y; /* zeros of the stronger of E_x and E_y along x and y */
  int material_count;
  const picket_confinement *confinement; /* borrowed from the result */
} picket_section_mode;

typedef struct picket_modes_point {
  double wavelength_um;
  int mode_count;
  const picket_section_mode *modes; /* by falling index; borrowed from the result */
  const char *note; /* why there is no mode, or why the point failed; null otherwise */
  int failed;       /* 1 if the point could not be computed */
} picket_modes_point;

typedef struct picket_modes_answer {
  int point_count;
  const picket_modes_point *points; /* borrowed from the result */
} picket_modes_answer;

/* Guided modes of the problem's `section` at each wavelength of its `light`: the first
 * `options->count` by index, all of them (up to 20) if that is 0. Mirror planes are used where the
 * section has them. The window is chosen from how fast the modes decay unless the section gives
 * one, whose border is then an electric wall. If nothing varies along x or y in a window that is
 * given, its walls there are the guide's own and every mode between them counts; otherwise it is
 * cut out of surroundings that go on, only modes above their index count, and the bars hold what
 * the walls may do.
 *
 * `index` and `group_index` are refined until their bars are below options->accuracy. Modes above
 * the highest index that a wave can have far out are guided. If there is none because a side (a
 * substrate) has a higher index than the guide's modes, the modes of the guide without that side
 * are followed into it: they leak, and loss_db_per_cm says how much. If no medium is above the
 * surroundings at all (a core between holes), modes leak on all sides.
 *
 * A section with a `bend_radius_um` is bent about the line x = -radius: its index is that of the
 * arc at x = 0 (β s, s the length there), dβ/dk0 at a fixed radius is its group index. Each guided
 * mode of the straight section is followed into the bend as the mode most like it. What leaves
 * towards +x counts as loss; where it can't be told (walls given by span_nm, less than 1e-26 of the
 * power per radian, a caustic more than 50 µm away, smaller than its bar) the losses are missing
 * with a note.
 *
 * A wavelength that cannot be computed is marked with the reason and does not stop the rest; if all
 * fail for the same reason, that is the failure of the call. What picket_index_find says on
 * `options->jobs` and PICKET_ERROR_STOPPED holds here too.
 *
 * PICKET_ERROR_INPUT without section or wavelengths, PICKET_ERROR_RANGE outside a material's range,
 * PICKET_ERROR_NUMERIC, PICKET_ERROR_MEMORY, PICKET_ERROR_STOPPED. Cost per wavelength: three grids
 * for each family of modes (four families for two mirror planes), on each one factorisation. */
PICKET_EXPORT picket_status picket_modes_find(picket_problem *problem,
                                              const picket_options *options, picket_result **out);

/* The same with a journal of finished wavelengths, as picket_index_find_resumable. */
PICKET_EXPORT picket_status picket_modes_find_resumable(picket_problem *problem,
                                                        const picket_options *options,
                                                        const char *journal_path,
                                                        picket_result **out);

/* 1 for a result of picket_modes_find, one for each value of a sweep; 0 for another kind of result.
 */
PICKET_EXPORT int picket_modes_count(const picket_result *result);

/* PICKET_ERROR_ARGUMENT if i or the kind of result is wrong; `out` is then untouched. */
PICKET_EXPORT picket_status picket_modes_get(const picket_result *result, int i,
                                             picket_modes_answer *out);

#ifdef __cplusplus
}
#endif

#endif
