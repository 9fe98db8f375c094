/* Mode-field diameters, µm, each by its own definition; S_z = Re(E_x h_y* - E_y h_x*). Those of a
 * Gaussian beam are all 2w, its diameter at 1/e² of the intensity.
 *
 *   Petermann II   along x: 2 √(∫|h_t|² / ∫|∂_x h_t|²); of the whole: 2 √(2 ∫|h_t|² / ∫|∇h_t|²)
 *                  (K. Petermann, Electron. Lett. 19, 712 (1983), there for round fibres; the field
 *                  taken here is h_t, which has no jumps: it decides how fast the far field
 * spreads) rms            along x: 4σ_x of S_z about its centroid; of the whole: 2√2 √(σ_x² + σ_y²)
 *   1/e²           along x: between the outermost places on the line through the centroid of S_z
 *                  where S_z falls to e⁻² of the largest value on that line
 *   Gaussian       that beam about the centroid of S_z, polarized along x or y, round or with two
 *                  diameters, that h_t resembles most: |∫h_c g|²/(∫|h_t|² ∫g²) is largest */
#ifndef PK_SECTION_WIDTHS_H
#define PK_SECTION_WIDTHS_H

#include "section/unfold.h"

/* NaN where there is none: 1/e² when S_z all but vanishes on the line or does not fall within the
 * window, the beams when none resembles the mode. */
typedef struct pk_section_widths {
  double petermann, petermann_along[2];
  double rms, rms_along[2];
  double fall_along[2];
  double beam, beam_overlap;
  double oval_along[2], oval_overlap; /* the beam with two diameters */
  pk_axis_name beam_polarization;
  double centroid[2];
} pk_section_widths;

/* The centroid of S_z and 4σ about it, along x and y. */
void pk_section_centre(const pk_section_whole *whole, double centroid[2], double rms_along[2]);

/* What the slopes of h_t across interfaces add to ∫|∂_x h_t|² and ∫|∂_y h_t|² of a part: the slope
 * jumps there by k0 Δε E_z (from ∂_x h_y - ∂_y h_x = -i k0 ε E_z), and the difference across the
 * line is the mean of both sides, whose square lacks (k0 Δε E_z)²/4. Without it the error is of
 * first order in the spacing. */
void pk_section_kinks(const pk_section *section, double k0, const pk_section_fields *part,
                      double kinks[2]);

/* kinks: of the whole plane; null for none. */
picket_status pk_section_widths_take(const pk_section_whole *whole, const double kinks[2],
                                     pk_section_widths *out);

#endif
