/* The two-dimensional models of a channel that are in use, as blocks of a problem file: the cell
 * seen from above, with slab indices, and the section of the homogenised row. */
#ifndef PK_API_CHANNEL_MODELS_H
#define PK_API_CHANNEL_MODELS_H

#include "io/document.h"
#include "study/problem.h"

/* Sets `cell` and its slab materials in a document of the channel's problem; the polarization of
 * the slabs is that of the modes. PICKET_ERROR_UNSUPPORTED for slices that are not rectangular. */
picket_status pk_channel_model_cell(const pk_problem *problem, pk_polarization polarization,
                                    pk_document *document);

/* Sets `section` and its layered materials. */
picket_status pk_channel_model_section(const pk_problem *problem, pk_document *document);

#endif
