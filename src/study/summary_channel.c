/* What was understood of a channel: its slices and planes, and the pitch at which it would radiate.
 *
 * Duty is the share of the pitch at which the middle of the shapes is not cladding. Above a pitch
 * of λ/(2n), n of the cladding, a wave at the edge of the zone lies above the light line, so that
 * past its stop band, and at longer waves in general, the channel radiates. */
#include <math.h>

#include "study/bragg.h"
#include "study/section_planes.h"
#include "study/summary_list.h"

static const double NM_PER_UM = 1000;

static double duty_of(const pk_channel_block *channel) {
  const pk_section_block *outline = &channel->outline;
  double at[2], filled = 0;
  for (int axis = 0; axis < 2; axis++) {
    double middle = 0.5 * (outline->low_um[axis] + outline->high_um[axis]);
    at[axis] = isfinite(middle) ? middle : 0;
  }
  for (int i = 0; i < channel->slices; i++) {
    bool core = pk_geometry_medium_at(channel->slice[i], at[0], at[1]) != channel->cladding;
    filled += core ? channel->from_um[i + 1] - channel->from_um[i] : 0;
  }
  return filled / channel->pitch_um;
}

static double smallest_of(const pk_channel_block *channel) {
  double smallest = INFINITY;
  for (int i = 0; i < channel->slices; i++) {
    smallest = fmin(smallest, pk_geometry_smallest_feature(channel->slice[i]));
    if (channel->slices > 1) {
      smallest = fmin(smallest, channel->from_um[i + 1] - channel->from_um[i]);
    }
  }
  return smallest;
}

static void add_planes(pk_summary_list *list, const pk_problem *problem) {
  static const char *const words[2][2] = {{"none", "x"}, {"y", "x and y"}};
  bool found[2] = {false, false};
  double centre = 0;
  for (int axis = 0; axis < 2 && list->status == PICKET_OK; axis++) {
    list->status =
        pk_planes_mirror(problem->context, &problem->channel.outline, axis, &found[axis], &centre);
  }
  pk_summary_text(list, "channel", NULL, "mirror_planes", words[found[1]][found[0]]);
  if (!problem->channel.use_planes) {
    pk_summary_text(list, "channel", NULL, "symmetry", "not used");
  }
}

static void add_limit(pk_summary_list *list, const pk_problem *problem) {
  const pk_channel_block *channel = &problem->channel;
  if (problem->light.count == 0 || list->status != PICKET_OK) {
    return;
  }
  double permittivity = NAN, shortest = problem->light.wavelength_um[0];
  list->status = pk_permittivity_at(problem, channel->cladding, shortest, &permittivity);
  double limit = shortest / (2 * sqrt(permittivity));
  if (!isfinite(limit)) {
    return;
  }
  pk_summary_number(list, "channel", NULL, "pitch_limit", NM_PER_UM * limit, "nm");
  if (channel->pitch_um > limit) {
    pk_summary_text(list, "channel", NULL, "caution",
                    "the pitch is above wavelength/(2 n) of the cladding: at the shortest "
                    "wavelength the channel may radiate");
  }
}

void pk_summary_channel(pk_summary_list *list, const pk_problem *problem) {
  const pk_channel_block *channel = &problem->channel;
  double smallest = smallest_of(channel);
  pk_summary_number(list, "channel", NULL, "pitch", NM_PER_UM * channel->pitch_um, "nm");
  pk_summary_text(list, "channel", NULL, "cladding",
                  pk_materials_name(problem->materials, channel->cladding));
  pk_summary_number(list, "channel", NULL, "slices", channel->slices, "");
  pk_summary_number(list, "channel", NULL, "duty", duty_of(channel), "");
  if (isfinite(smallest)) {
    pk_summary_number(list, "channel", NULL, "smallest_feature", NM_PER_UM * smallest, "nm");
  }
  add_planes(list, problem);
  add_limit(list, problem);
}
