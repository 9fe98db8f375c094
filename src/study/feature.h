/* The smallest feature that a mask draws, against the rule of the file. */
#ifndef PK_STUDY_FEATURE_H
#define PK_STUDY_FEATURE_H

#include "study/measure.h"

/* µm; of a section or a channel across and along it, for its heights are those of films. NaN if
 * there is none. */
double pk_smallest_feature(const pk_problem *problem, pk_structure structure);

/* 1 or 0; -1 without a rule. */
int pk_feature_respects(const pk_rules_block *rules, double smallest_um);

#endif
