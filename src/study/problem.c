/* See problem.h. */
#include "study/problem.h"

#include "base/memory.h"

static void clear_channel(picket_context *context, pk_channel_block *channel) {
  for (int i = 0; i < channel->slices; i++) {
    pk_geometry_free(channel->slice[i]);
  }
  pk_free(context, channel->slice);
  pk_free(context, channel->from_um);
  pk_free(context, channel->outline.used);
}

static void clear_tolerance(picket_context *context, pk_tolerance_block *tolerance) {
  for (int i = 0; tolerance->spread && i < tolerance->count; i++) {
    pk_free(context, tolerance->spread[i].vary);
    pk_free(context, tolerance->spread[i].group);
  }
  pk_free(context, tolerance->spread);
}

void pk_problem_free(pk_problem *problem) {
  if (!problem) {
    return;
  }
  picket_context *context = problem->context;
  pk_free(context, problem->name);
  pk_free(context, problem->light.wavelength_um);
  pk_materials_free(problem->materials);
  pk_geometry_free(problem->cell.geometry);
  for (int i = 0; problem->path.point && i < problem->path.count; i++) {
    pk_free(context, problem->path.point[i].label);
  }
  pk_free(context, problem->path.point);
  pk_free(context, (void *)problem->slab.recipe.film_material);
  pk_free(context, (void *)problem->slab.recipe.film_thickness_um);
  pk_geometry_free(problem->section.geometry);
  pk_free(context, problem->section.used);
  clear_channel(context, &problem->channel);
  for (int i = 0; i < PK_AIM_PARTS; i++) {
    pk_free(context, problem->aim.part[i].vary);
  }
  clear_tolerance(context, &problem->tolerance);
  for (int i = 0; i < PK_TAPER_CHANGES; i++) {
    pk_free(context, problem->taper.change[i].vary);
  }
  pk_free(context, problem);
  pk_context_release(context);
}
