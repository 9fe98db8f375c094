/* channel: planes across a guide, each for a range of z of one pitch. See read.h.
 *
 * The ends of the shapes along z, taken into one pitch, cut it into slices; every slice is a plane
 * of its own, painted in the order of the file with the shapes that reach through it. So a later
 * shape covers earlier ones in its own range and nowhere else. The list is read twice: for the
 * ends, and to paint. */
#include <math.h>

#include "base/memory.h"
#include "io/read.h"

enum { MOST_SLICES = 100 }; /* a row has a few; each one is averaged on every grid */

enum { KEY_PITCH, KEY_CLADDING, KEY_SYMMETRY, KEY_SPAN, KEY_SHAPES, KEY_COUNT };
static const pk_key keys[KEY_COUNT] = {
    [KEY_PITCH] = {"pitch_nm", true},     [KEY_CLADDING] = {"cladding", true},
    [KEY_SYMMETRY] = {"symmetry", false}, [KEY_SPAN] = {"span_nm", false},
    [KEY_SHAPES] = {"shapes", true},
};

typedef struct canvas {
  picket_context *context;
  pk_channel_block *channel;
  double pitch; /* nm */
  int count;
  double end[MOST_SLICES]; /* [count] rising, nm in [-pitch/2, pitch/2) */
} canvas;

static double wrap(double z, double pitch) {
  double w = z - pitch * floor(z / pitch + 0.5);
  return w > pitch * (0.5 - PK_BORDER_TOLERANCE) ? -0.5 * pitch : w;
}

static picket_status add_end(canvas *c, const pk_shape *shape, double z) {
  const double w = wrap(z, c->pitch), same = c->pitch * PK_BORDER_TOLERANCE;
  int at = 0;
  while (at < c->count && c->end[at] < w - same) {
    at++;
  }
  if (at < c->count && c->end[at] <= w + same) {
    return PICKET_OK;
  }
  if (c->count == MOST_SLICES) {
    return pk_fail_at(c->context, PICKET_ERROR_INPUT, shape->node->place,
                      "%s cuts the pitch into more than %d slices, allowed are at most %d",
                      pk_node_path(shape->node).text, MOST_SLICES, MOST_SLICES);
  }
  for (int i = c->count++; i > at; i--) {
    c->end[i] = c->end[i - 1];
  }
  c->end[at] = w;
  return PICKET_OK;
}

static bool is_whole(const canvas *c, const pk_shape *shape) {
  return shape->along[1] - shape->along[0] >= c->pitch * (1 - PK_BORDER_TOLERANCE);
}

static picket_status take_ends(void *owner, const pk_shape *shape) {
  canvas *c = owner;
  pk_read_plane_note(shape, &c->channel->outline);
  picket_status status = PICKET_OK;
  for (int end = 0; status == PICKET_OK && !is_whole(c, shape) && end < 2; end++) {
    status = add_end(c, shape, shape->along[end]);
  }
  return status;
}

/* Whether a shape reaches through slice i: it does or does not as a whole. */
static bool reaches(const canvas *c, const pk_shape *shape, int i) {
  const double next = i + 1 < c->count ? c->end[i + 1] : c->end[0] + c->pitch;
  const double from_start = 0.5 * (c->end[i] + next) - shape->along[0];
  const double inside = from_start - c->pitch * floor(from_start / c->pitch);
  return is_whole(c, shape) || inside < shape->along[1] - shape->along[0];
}

static picket_status paint(void *owner, const pk_shape *shape) {
  const canvas *c = owner;
  picket_status status = PICKET_OK;
  for (int i = 0; status == PICKET_OK && i < c->channel->slices; i++) {
    if (reaches(c, shape, i)) {
      status = pk_shape_paint(c->context, shape, c->channel->slice[i]);
    }
  }
  return status;
}

/* Empty planes, one for each slice. */
static picket_status open_slices(canvas *c, int cladding) {
  pk_channel_block *channel = c->channel;
  if (c->count == 0) {
    c->end[c->count++] = -0.5 * c->pitch;
  }
  channel->from_um = PK_NEW(c->context, c->count + 1, double);
  channel->slice = PK_NEW(c->context, c->count, pk_geometry *);
  if (!channel->from_um || !channel->slice) {
    return PICKET_ERROR_MEMORY;
  }
  channel->slices = c->count;
  picket_status status = PICKET_OK;
  for (int i = 0; status == PICKET_OK && i < c->count; i++) {
    channel->from_um[i] = c->end[i] / PK_NM_PER_UM;
    status = pk_read_plane_create(c->context, cladding, &channel->slice[i]);
  }
  channel->from_um[c->count] = channel->from_um[0] + channel->pitch_um;
  return status;
}

static picket_status read_head(pk_reader *reader, const pk_node *const *values,
                               pk_channel_block *channel) {
  static const char *const words[] = {"auto", "none"};
  const pk_limits limits = {0, PK_LENGTH_HIGH_NM, true, false, false, "nm"};
  picket_context *context = reader->context;
  double nm = 0;
  int choice = 0;
  picket_status status = pk_read_number(context, values[KEY_PITCH], &limits, &nm);
  if (status == PICKET_OK) {
    status = pk_read_material(reader, values[KEY_CLADDING], &channel->cladding);
  }
  if (status == PICKET_OK && values[KEY_SYMMETRY]) {
    status = pk_read_choice(context, values[KEY_SYMMETRY], words, 2, &choice);
  }
  if (status == PICKET_OK) {
    status = pk_read_plane_open(reader, channel->cladding, values[KEY_SPAN], &channel->outline);
  }
  channel->pitch_um = nm / PK_NM_PER_UM;
  channel->use_planes = choice == 0;
  return status;
}

static picket_status read_planes(pk_reader *reader, const pk_node *shapes,
                                 pk_channel_block *channel) {
  canvas c = {
      .context = reader->context, .channel = channel, .pitch = channel->pitch_um * PK_NM_PER_UM};
  pk_shape_plane plane = PK_PLANE_ACROSS;
  plane.pitch_nm = c.pitch;
  picket_status status = pk_read_shapes(reader, shapes, &plane, take_ends, &c);
  if (status == PICKET_OK) {
    status = open_slices(&c, channel->cladding);
  }
  return status == PICKET_OK ? pk_read_shapes(reader, shapes, &plane, paint, &c) : status;
}

picket_status pk_read_channel(pk_reader *reader, const pk_node *node) {
  pk_channel_block *channel = &reader->problem->channel;
  const pk_node *values[KEY_COUNT];
  reader->layered = true;
  picket_status status = pk_read_block(reader->context, node, keys, KEY_COUNT, values);
  if (status == PICKET_OK) {
    status = read_head(reader, values, channel);
  }
  if (status == PICKET_OK) {
    status = read_planes(reader, values[KEY_SHAPES], channel);
  }
  if (status == PICKET_OK) {
    status = pk_read_plane_check(reader, node, "channel", &channel->outline);
  }
  reader->layered = false;
  channel->given = status == PICKET_OK;
  channel->place = channel->outline.place = node->place;
  if (channel->given) {
    channel->outline.given = true;
    channel->outline.geometry = channel->slice[0];
    channel->outline.others = channel->slices - 1;
    channel->outline.other = channel->slice + 1;
  }
  return status;
}
