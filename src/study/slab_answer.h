/* The modes of a film stack in one polarization. */
#ifndef PK_STUDY_SLAB_ANSWER_H
#define PK_STUDY_SLAB_ANSWER_H

#include <picket/slab.h>

#include "study/problem.h"

/* Has the problem a slab and wavelengths? */
picket_status pk_slab_check(const pk_problem *problem);

/* Fills an answer of zeros, the caller's (pk_slab_answer_clear), also after a failure. Errors as
 * picket_slab_find. */
picket_status pk_slab_of(const pk_problem *problem, pk_slab_polarization polarization,
                         const picket_options *options, picket_slab_answer *answer);
void pk_slab_answer_clear(picket_context *context, picket_slab_answer *answer);

#endif
