/* A channel before and on a grid: its survey at a wavelength, and a member of the family of its
 * grids with a number of harmonics, ready to be solved. */
#ifndef PK_STUDY_CHANNEL_LEVEL_H
#define PK_STUDY_CHANNEL_LEVEL_H

#include <picket/result.h>

#include "channel/media.h"
#include "study/section_survey.h"

/* The modes asked for are te-like or tm-like: E along x or along y. Seen from above, as the cell
 * that a designer draws, the normal of the drawing is y: te-like is its hy, tm-like its ey. */
typedef struct pk_channel_survey {
  const pk_problem *problem;
  pk_polarization polarization; /* PK_HY: te-like, PK_EY: tm-like */
  pk_section_survey section;    /* of all slices together */
} pk_channel_survey;

picket_polarization pk_channel_word(pk_polarization polarization);

/* True if questions that a cell or a channel can answer go to the channel. */
bool pk_asks_channel(const pk_problem *problem);
/* How the answer of a polarization is called: of the cell, else of the channel. */
picket_polarization pk_answer_word(const pk_problem *problem, pk_polarization polarization);

picket_status pk_channel_survey_take(const pk_problem *problem, pk_polarization polarization,
                                     double wavelength_um, pk_channel_survey *out);
void pk_channel_survey_clear(pk_channel_survey *survey); /* accepts zeros */

/* As pk_section_survey_set_apart, but only for sides beyond the shapes, such as a substrate: a
 * channel that lies below all its surroundings in index guides nothing. */
picket_status pk_channel_survey_set_apart(pk_channel_survey *survey, bool *done);

/* A base grid for modes of an index; see pk_section_wish. */
picket_status pk_channel_survey_lay(const pk_channel_survey *survey, double index, double reach,
                                    bool closed, double accuracy, pk_end outer, pk_axis *x,
                                    pk_axis *y);

typedef struct pk_channel_level {
  picket_context *context;
  pk_channel *channel;
  pk_channel_media media;
} pk_channel_level;

/* Member m of the family of a base grid with the harmonics -harmonics - 1 to harmonics; the media
 * at k0. */
picket_status pk_channel_level_open(const pk_channel_survey *survey, const pk_axis *x,
                                    const pk_axis *y, int m, int harmonics, double k0,
                                    pk_channel_level *out);
void pk_channel_level_close(pk_channel_level *level); /* accepts zeros */

double pk_channel_level_unknowns(const pk_axis *x, const pk_axis *y, int m, int harmonics);

#endif
