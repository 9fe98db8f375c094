/* Picket: Floquet–Bloch modes and band edges of segmented optical waveguides, each number with an
 * error bar. This header brings in the whole public interface. */
#ifndef PICKET_H
#define PICKET_H

#include <picket/aim.h>
#include <picket/bands.h>
#include <picket/context.h>
#include <picket/derivative.h>
#include <picket/edges.h>
#include <picket/field.h>
#include <picket/figure.h>
#include <picket/index.h>
#include <picket/match.h>
#include <picket/modes.h>
#include <picket/options.h>
#include <picket/problem.h>
#include <picket/quantity.h>
#include <picket/result.h>
#include <picket/section_field.h>
#include <picket/slab.h>
#include <picket/status.h>
#include <picket/summary.h>
#include <picket/sweep.h>
#include <picket/taper.h>
#include <picket/tolerance.h>
#include <picket/version.h>

#endif
