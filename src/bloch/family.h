/* Recognising standing waves of the fundamental family.
 *
 * Near k = mπ/Λ the fundamental mode and its reflection are a(x) exp(±imπz/Λ) with one lateral
 * shape a(x). The likeness of a real standing wave f is the part of its norm in their span: |⟨a,
 * b⟩|² / (⟨a, a⟩ ⟨f, f⟩ Λ/2),   b(x) = ∫ f exp(-imπz/Λ) dz. */
#ifndef PK_BLOCH_FAMILY_H
#define PK_BLOCH_FAMILY_H

#include <complex.h>

#include "operator/operator.h"

/* b(x) of a field at a harmonic m: out[nv]. */
void pk_family_shape(const pk_operator *op, double pitch_um, int harmonic,
                     const double complex *field, double complex *out);

/* 0 to 1. */
double pk_family_likeness(const pk_operator *op, double pitch_um, int harmonic,
                          const double complex *shape, const double complex *field,
                          double complex *work);

#endif
