/* Bloch phases of a wavenumber. */
#ifndef PK_BLOCH_PHASE_H
#define PK_BLOCH_PHASE_H

#include "geometry/cell.h"
#include "operator/operator.h"

/* The phases at k = (kz, kx) in π/pitch and π/lateral span: ξ = exp(iπ kz),
 * χ = exp(iπ (kz shift + kx)). Exactly ±1 at zone centres and edges, so that real arithmetic is
 * used. */
pk_phase pk_phase_at(const pk_cell *cell, double kz, double kx);

#endif
