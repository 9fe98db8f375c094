/* Which Bloch waves of a cell at a frequency are modes of the guide: all waves of the discrete cell
 * are found, those of the absorbing layers and those below cut-off are left out, and the rest are
 * put in order by their lateral nodes. */
#ifndef PK_BLOCH_SEARCH_H
#define PK_BLOCH_SEARCH_H

#include "bloch/character.h"
#include "bloch/solver.h"

typedef struct pk_found_wave {
  pk_wave wave;
  pk_character character;
} pk_found_wave;

/* A wave that owes less to the layers is a mode of the guide (leaky ones measured 1e-6 to 1e-4).
 * Those found above it are loosely bound, or waves of the layers after all: a grid whose layers are
 * farther off tells. */
#define PK_LAYER_SHARE_SURE 2e-3

/* Forward modes, by rising number of nodes and falling index.
 *   capacity  most that are kept in found[]
 *   count     receives how many there are, at most capacity; 0 is an outcome */
picket_status pk_wave_search(pk_solver *solver, const pk_character_request *request, int capacity,
                             pk_found_wave *found, int *count);
void pk_found_waves_clear(picket_context *context, int count, pk_found_wave *found);

#endif
