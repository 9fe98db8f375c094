/* Which Bloch waves of a cell at a frequency are modes of the guide: all waves of the discrete cell
 * are found, those of the absorbing layers and those below cut-off are left out, and the rest are
 * put in order by their lateral nodes. */
#ifndef PK_BLOCH_SEARCH_H
#define PK_BLOCH_SEARCH_H

#include "bloch/character.h"
#include "bloch/solver.h"

typedef struct pk_found_wave {
  int order; /* nodes, raised where two modes have the same number */
  pk_wave wave;
  pk_character character;
} pk_found_wave;

/* Forward modes, by rising order.
 *   capacity  most that are kept in found[]
 *   count     receives how many there are, at most capacity; 0 is an outcome */
picket_status pk_wave_search(pk_solver *solver, const pk_character_request *request, int capacity,
                             pk_found_wave *found, int *count);
void pk_found_waves_clear(picket_context *context, int count, pk_found_wave *found);

#endif
