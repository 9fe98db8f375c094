/* A bent section: where its grid ends, its modes from those of the straight one, and its loss. */
#ifndef PK_STUDY_SECTION_BEND_H
#define PK_STUDY_SECTION_BEND_H

#include "section/fields.h"
#include "study/section_family.h"

bool pk_section_bent(const pk_section_survey *survey);

/* Of the indices of modes [count], falling, the highest whose loss by radiation a grid can show:
 * its absorbing layer serves them all. 0 if there is none, or if the bend is none. */
double pk_section_bend_leaking(const pk_section_survey *survey, int count, const double *index);

/* The ends of the x axis of a bend, its layer and its outer steps; wish->leaking is the number
 * above. */
void pk_section_bend_place(const pk_section_survey *survey, const pk_section_wish *wish,
                           pk_axis_wish *x);

/* Distance of the walls above and below that the wave on its way out needs. */
double pk_section_bend_height(const pk_section_survey *survey, const pk_section_wish *wish);

/* The x axis that the straight guide is solved on, before it is bent: without the layer, whose own
 * waves would come before the guided ones. Arrays are those of `x`. */
pk_axis pk_section_bend_before(const pk_section_survey *survey, const pk_axis *x);

/* Takes the modes of a straight section on member m of base axes to the bent one, which takes its
 * place in *section. A mode is followed as the one most like it, in steps of the curvature that
 * leave it alike. PICKET_ERROR_NUMERIC if it is lost on the way. */
picket_status pk_section_bend_follow(const pk_section_survey *survey, const pk_axis *x,
                                     const pk_axis *y, int m, pk_section **section, int count,
                                     pk_section_mode *modes);

/* Im β of a mode of a bend, by what it sends outwards where that is all it loses. */
double pk_section_bend_loss(const pk_section_family *family, const pk_section *section,
                            const pk_section_mode *mode, const pk_section_fields *fields);

/* Puts right what is known of the loss of mode i of a family, and adds that of a quarter turn. */
void pk_section_bend_judge(const pk_section_family *family, int i, picket_section_mode *mode);

#endif
