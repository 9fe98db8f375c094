/* The quantities that can be aimed at and required, by their names in a file; measured in
 * measure.h. */
#ifndef PK_STUDY_MEASURED_H
#define PK_STUDY_MEASURED_H

#include <stdbool.h>

typedef enum pk_measured {
  PK_MEASURED_CLEARANCE,  /* clearance_nm: shortest wavelength of light minus the long edge */
  PK_MEASURED_LONG,       /* long_nm: long-wavelength edge of the first stop band */
  PK_MEASURED_SHORT,      /* short_nm */
  PK_MEASURED_EDGE_DRIFT, /* edge_drift_nm_per_k: of the long edge */
  PK_MEASURED_BLOCH_INDEX,
  PK_MEASURED_GROUP_INDEX,
  PK_MEASURED_DISPERSION, /* dispersion, ps/(nm km) */
  PK_MEASURED_INDEX,      /* index: of a mode of a section */
  PK_MEASURED_INDEX_RATE, /* dn_dt_per_k: of the Bloch index, or of a section's index */
  PK_MEASURED_DRIFT,      /* drift_pm_per_k: λ (dn/dT)/n_g, of a resonance */
  PK_MEASURED_COUNT
} pk_measured;

/* Its key in a file, e.g. "clearance_nm". Static text. */
const char *pk_measured_name(pk_measured what);
/* Its unit for people, "" for a pure number. */
const char *pk_measured_unit(pk_measured what);
/* Whether it is a quantity at one wavelength (at_nm). */
bool pk_measured_at_wavelength(pk_measured what);

#endif
