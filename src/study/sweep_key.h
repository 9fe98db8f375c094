/* The fingerprint of everything that the pieces of a sweep depend on: whether a journal is of it.
 */
#ifndef PK_STUDY_SWEEP_KEY_H
#define PK_STUDY_SWEEP_KEY_H

#include <stdint.h>

#include "study/sweep.h"

/* The question, the document, the path, the options of the numbers, and what the materials are over
 * their ranges: tables are files of their own. */
uint64_t pk_sweep_key_of_run(const pk_sweep_kind *kind, const pk_sweep_source *source,
                             const picket_options *options);

/* Followed by what the materials of a problem are at its wavelengths. */
uint64_t pk_sweep_key_of_media(uint64_t key, const pk_problem *problem);

#endif
