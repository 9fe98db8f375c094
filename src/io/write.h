/* A result as a document: JSON for programs, comma-separated values for spreadsheets. Lengths are
 * nm in both, µm in the result. The text is the caller's (pk_free). */
#ifndef PK_IO_WRITE_H
#define PK_IO_WRITE_H

#include "study/result.h"

/* One JSON object, as the contract of the command line says; a number that is not finite is null.
 * PICKET_ERROR_MEMORY. */
picket_status pk_json_write(const picket_result *result, char **out);

/* One header line, units in the names of the columns, quoting as in RFC 4180; a number that is not
 * finite is an empty field. Rows: edges, one per stop band (what holds for its polarization is
 * repeated in each); bands, one per wavenumber with a pair of columns per band; slab
 * and index, one per mode (index also one per point without modes, with the reason); summary, one
 * per item. PICKET_ERROR_MEMORY. */
picket_status pk_csv_write(const picket_result *result, char **out);

/* Words that both documents use. */
const char *pk_word_polarization(picket_polarization polarization);
const char *pk_word_slab_polarization(picket_slab_polarization polarization);

static const double PK_NM_OF_UM = 1000.0;
static const double PK_DEGREES = 57.29577951308232088; /* of a radian */

/* What the numbers of a row leave out. */
#define PK_TAPER_LIMITS                                                                         \
  "overlaps of the transverse H of neighbours as if each went on for ever; what a joint loses " \
  "counts as "                                                                                  \
  "lost, reflection is not included; sizes and shares are of the lateral direction alone"

/* What the overlap of a match leaves out. */
#define PK_MATCH_LIMITS \
  "reflection where the two meet, of a facet too, is not included; a tilt counts as a phase"

#endif
