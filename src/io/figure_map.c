/* The shapes as the file says them, painted over each other in shades that darken with the index,
 * with the materials and their indices beside them: a cell over one period seen from above (z along
 * the guide, x across), a section (x across, y up), a channel as its different slices.
 *
 * Data, nm: <block>_shapes holds the corners of one polygon after the other, two blank lines
 * between them; <block>_levels has a line "shade index" for each material. */
#include <stdio.h>

#include "base/memory.h"
#include "geometry/draw.h"
#include "io/figure_script.h"
#include "study/bragg.h"

enum {
  TOP = 82, /* dots, as all below */
  MAP_LEFT = 84,
  MAP_WIDTH = 556,
  MAP_HEIGHT = 400,
  LEAST_SIDE = 48,
  LEAST_HEIGHT = 120, /* of a page's map: room for the key */
  AXIS = 60,
  HEADING = 24, /* of a slice */
  SLICE_GAP = 92,
  KEY_AWAY = 28,
  KEY_STEP = 24,
  MOST_KEYS = 14,
  KEY_LETTERS = 17, /* of a material's name in the key */
  MOST_SLICES = 4
};

static const double USUAL_UM = 1.55; /* where indices are shown without a light */
static const double AROUND = 0.35;   /* of the extent of the shapes, left free on every side */

/* Which materials are in a map, and how dark each is. */
typedef struct palette {
  int count; /* of all materials */
  bool *used;
  double *index; /* NaN where it is not known */
  double wavelength_um;
} palette;

static void palette_free(picket_context *context, palette *p) {
  pk_free(context, p->used);
  pk_free(context, p->index);
}

static picket_status palette_make(pk_figure *f, palette *p) {
  picket_context *context = f->result->context;
  const pk_light *light = &f->problem->light;
  *p = (palette){.count = pk_materials_count(f->problem->materials), .wavelength_um = USUAL_UM};
  p->used = PK_NEW(context, p->count, bool);
  p->index = PK_NEW(context, p->count, double);
  if (!p->used || !p->index) {
    palette_free(context, p);
    return PICKET_ERROR_MEMORY;
  }
  if (light->given && light->count > 0) {
    p->wavelength_um = light->wavelength_um[light->count / 2];
  }
  picket_status status = PICKET_OK;
  for (int i = 0; i < p->count && status == PICKET_OK; i++) {
    double permittivity = NAN;
    status = pk_permittivity_at(f->problem, i, p->wavelength_um, &permittivity);
    p->index[i] = permittivity > 0 ? sqrt(permittivity) : NAN;
  }
  if (status != PICKET_OK) {
    palette_free(context, p);
  }
  return status;
}

/* From pale for the lowest index to dark for the highest. A material without a known index (a
 * metal, or outside its range) is the darkest. */
static unsigned shade_of(const palette *p, int material) {
  static const int pale[] = {0xee, 0xf0, 0xec}, dark[] = {0x2c, 0x48, 0x66};
  double low = INFINITY, high = -INFINITY, part = 1;
  for (int i = 0; i < p->count; i++) {
    if (p->used[i] && isfinite(p->index[i])) {
      low = fmin(low, p->index[i]);
      high = fmax(high, p->index[i]);
    }
  }
  if (isfinite(p->index[material])) {
    part = high > low ? (p->index[material] - low) / (high - low) : 0;
  }
  unsigned shade = 0;
  for (int c = 0; c < 3; c++) {
    shade = shade << 8 | (unsigned)lround(pale[c] + part * (dark[c] - pale[c]));
  }
  return shade;
}

/* The window along axis a: what is given, the shapes with something around them, or the period. */
static void choose_window(pk_map *map, int a, double given_um, double low, double high) {
  const pk_frame *frame = pk_geometry_frame(map->geometry);
  if (given_um > 0) {
    low = -given_um / 2;
    high = given_um / 2;
  } else if (frame->periodic[a] || !(low <= high)) {
    low = isfinite(frame->from[a]) ? frame->from[a] : -0.5; /* nothing ends: a window like any */
    high = isfinite(frame->to[a]) ? frame->to[a] : 0.5;
  } else {
    double around = low < high ? AROUND * (high - low) : 0.5;
    low -= around;
    high += around;
  }
  map->low[a] = low;
  map->high[a] = high;
}

/* The part of a place that the window fills with equal scales. A very long or flat one is given
 * some width and height; its scales then differ. */
static void lay_out(pk_map *map, int left, int top, int width, int height) {
  double ratio = (map->high[1] - map->low[1]) / (map->high[0] - map->low[0]);
  map->left = left;
  map->top = top;
  map->width = ratio * width > height ? (int)(height / ratio) : width;
  map->height = ratio * width > height ? height : (int)(ratio * width);
  map->width = map->width < LEAST_SIDE ? LEAST_SIDE : map->width;
  map->height = map->height < LEAST_SIDE ? LEAST_SIDE : map->height;
}

static pk_map map_of_cell(const pk_cell *cell) {
  pk_map map = {.geometry = cell->geometry, .block = "cell", .label = {"z", "x"}};
  bool uniform = cell->lateral == PK_LATERAL_UNIFORM;
  for (int a = 0; a < 2; a++) {
    double low = INFINITY, high = -INFINITY;
    bool walls = a == 1 && (cell->lateral == PK_LATERAL_ELECTRIC ||
                            cell->lateral == PK_LATERAL_MAGNETIC || cell->span_um > 0);
    pk_geometry_extent(cell->geometry, (pk_axis_name)a, &low, &high);
    choose_window(&map, a,
                  a == 0    ? cell->pitch_um
                  : uniform ? cell->pitch_um / 2
                  : walls   ? cell->span_um
                            : 0,
                  low, high);
  }
  lay_out(&map, MAP_LEFT, TOP, MAP_WIDTH, MAP_HEIGHT);
  return map;
}

pk_map pk_map_of_section(const pk_section_block *section, int left, int top, int width,
                         int height) {
  pk_map map = {.geometry = section->geometry, .block = "section", .label = {"x", "y"}};
  /* As much is left free above as beside: sections are flat. */
  double size = 0;
  for (int a = 0; a < 2; a++) {
    size = fmax(size, section->high_um[a] - section->low_um[a]);
  }
  for (int a = 0; a < 2; a++) {
    double low = section->low_um[a], high = section->high_um[a];
    double lack = low <= high && size > 0 ? (size - (high - low)) / 4 : 0;
    choose_window(&map, a, section->span_um[a], low - lack, high + lack);
  }
  lay_out(&map, left, top, width, height);
  return map;
}

static void mark_used(palette *p, const pk_map *map, const pk_drawn *drawn, int count) {
  p->used[pk_geometry_frame(map->geometry)->background] = true;
  for (int i = 0; i < count; i++) {
    p->used[drawn[i].medium] = true;
  }
}

static void put_polygons(pk_figure *f, const pk_map *map, const palette *p, const pk_drawn *drawn,
                         int count) {
  int background = pk_geometry_frame(map->geometry)->background;
  const double *l = map->low, *h = map->high;
  const double frame[4][2] = {{l[0], l[1]}, {h[0], l[1]}, {h[0], h[1]}, {l[0], h[1]}};
  pk_put(f, "$%s_shapes << END\n# %s_nm %s_nm, and the index\n", map->block, map->label[0],
         map->label[1]);
  for (int i = -1; i < count; i++) {
    int corners = i < 0 ? 4 : drawn[i].count;
    int medium = i < 0 ? background : drawn[i].medium;
    for (int c = 0; c <= corners; c++) { /* closed */
      const double *at = i < 0 ? frame[c % corners] : drawn[i].at[c % corners];
      pk_put_value(f, PK_NM_OF_UM * at[0]);
      pk_put_value(f, PK_NM_OF_UM * at[1]);
      pk_put_value(f, p->index[medium]);
      pk_put(f, "\n");
    }
    pk_put(f, "\n\n");
  }
  pk_put(f, "END\n");
}

/* Each polygon is a piece of the plot. */
static void put_panel(pk_figure *f, const pk_map *map, const palette *p, const pk_drawn *drawn,
                      int count) {
  static const char axis[2][2] = {"x", "y"};
  pk_figure_place(f, map->left, map->left + map->width, map->top, map->top + map->height);
  pk_put(f, "set xlabel '%s (nm)' offset 0,0.2\nset ylabel '%s (nm)' offset 1,0\nset border 15\n",
         map->label[0], map->label[1]);
  for (int a = 0; a < 2; a++) {
    double from = PK_NM_OF_UM * map->low[a], to = PK_NM_OF_UM * map->high[a];
    pk_put(f, "set %srange [%.10g:%.10g]\n", axis[a], from, to);
    pk_figure_tics(f, axis[a], from, to, a == 0 ? map->width : map->height);
  }
  pk_put(f, "plot");
  for (int i = -1; i < count; i++) {
    int medium = i < 0 ? pk_geometry_frame(map->geometry)->background : drawn[i].medium;
    pk_put(f,
           "%s $%s_shapes using 1:2 index %d with filledcurves closed fc rgb '#%06x' fs solid 1 "
           "border lc rgb '" PK_INK "' lw 0.6",
           i < 0 ? "" : ", \\\n ", map->block, i + 1, shade_of(p, medium));
  }
  pk_put(f, "\n");
}

static void put_swatch(pk_figure *f, const palette *p, int material, int row, int left, int top) {
  char words[32] = " (not known)";
  if (isfinite(p->index[material])) {
    snprintf(words, sizeof words, " %.4f", p->index[material]);
  }
  pk_put(f,
         "set object %d rectangle from screen %.4f,%.4f to screen %.4f,%.4f fillcolor rgb "
         "'#%06x' fillstyle solid 1 border lc rgb '" PK_INK "' lw 0.6\n",
         20 + row, (double)left / PK_FIGURE_WIDTH, 1 - (top + 13.0) / f->height,
         (left + 22.0) / PK_FIGURE_WIDTH, 1 - (top - 1.0) / f->height, shade_of(p, material));
  pk_put(f, "set label %d ", 21 + row);
  pk_put_text(f, "", pk_materials_name(f->problem->materials, material), KEY_LETTERS);
  pk_put(f, ".'%s' at screen %.4f,%.4f left noenhanced font ',11'\n", words,
         (left + 30.0) / PK_FIGURE_WIDTH, 1 - (top + 6.0) / f->height);
}

/* Swatches with names and indices, from the top of the map downwards. */
static void put_key(pk_figure *f, const palette *p, int left, int top) {
  int row = 0, more = 0;
  pk_put(f, "set label 20 'index at %.6g nm' at screen %.4f,%.4f left font ',11'\n",
         PK_NM_OF_UM * p->wavelength_um, (double)left / PK_FIGURE_WIDTH,
         1 - (top + 6.0) / f->height);
  for (int i = 0; i < p->count; i++) {
    if (p->used[i] && row < MOST_KEYS) {
      put_swatch(f, p, i, row, left, top + KEY_STEP * (row + 1));
      row++;
    } else {
      more += p->used[i];
    }
  }
  if (more > 0) {
    pk_put(f, "set label %d 'and %d more' at screen %.4f,%.4f left font ',11'\n", 21 + row, more,
           (left + 30.0) / PK_FIGURE_WIDTH,
           1 - (double)(top + KEY_STEP * (row + 1) + 6) / f->height);
  }
}

static picket_status put_map(pk_figure *f, palette *p, const pk_map *map, bool key) {
  pk_drawn *drawn = NULL;
  int count = 0;
  picket_status status = pk_geometry_draw(map->geometry, map->low, map->high, &drawn, &count);
  if (status != PICKET_OK) {
    return status;
  }
  mark_used(p, map, drawn, count);
  put_polygons(f, map, p, drawn, count);
  if (key) {
    put_key(f, p, map->left + map->width + KEY_AWAY, map->top);
  }
  put_panel(f, map, p, drawn, count);
  pk_drawn_free(f->result->context, drawn, count);
  return PICKET_OK;
}

picket_status pk_map_put(pk_figure *f, const pk_map *map, bool key) {
  palette p;
  picket_status status = palette_make(f, &p);
  if (status == PICKET_OK) {
    status = put_map(f, &p, map, key);
    palette_free(f->result->context, &p);
  }
  return status;
}

static picket_status draw_one(pk_figure *f, const pk_map *map, const char *shows) {
  int height = map->height < LEAST_HEIGHT ? LEAST_HEIGHT : map->height;
  pk_figure_open(f, shows, TOP + height + AXIS);
  return pk_map_put(f, map, true);
}

static picket_status mark_slices(picket_context *context, palette *p, pk_map *map,
                                 const pk_channel_block *channel, int slices) {
  picket_status status = PICKET_OK;
  for (int i = 0; i < slices && status == PICKET_OK; i++) {
    pk_drawn *drawn = NULL;
    int count = 0;
    map->geometry = channel->slice[i];
    status = pk_geometry_draw(map->geometry, map->low, map->high, &drawn, &count);
    if (status == PICKET_OK) {
      mark_used(p, map, drawn, count);
      pk_drawn_free(context, drawn, count);
    }
  }
  return status;
}

/* The slices side by side; shades and key hold for all of them. */
static picket_status draw_slices(pk_figure *f, palette *p, int slices) {
  static const char *const names[MOST_SLICES] = {"slice_1", "slice_2", "slice_3", "slice_4"};
  const pk_channel_block *channel = &f->problem->channel;
  int width = (MAP_WIDTH - SLICE_GAP * (slices - 1)) / slices;
  pk_map map = pk_map_of_section(&channel->outline, MAP_LEFT, TOP + HEADING, width, MAP_HEIGHT);
  picket_status status = mark_slices(f->result->context, p, &map, channel, slices);
  pk_figure_open(f, "The channel as the file says it: what lies across it, along a pitch",
                 TOP + HEADING + (map.height < LEAST_HEIGHT ? LEAST_HEIGHT : map.height) + AXIS);
  pk_put(f, "set multiplot\n");
  for (int i = 0; i < slices && status == PICKET_OK; i++) {
    map.geometry = channel->slice[i];
    map.block = names[i];
    pk_put(f, "set label 19 'z from %.6g to %.6g nm' at graph 0,1 offset 0,0.7 left font ',11'\n",
           PK_NM_OF_UM * channel->from_um[i], PK_NM_OF_UM * channel->from_um[i + 1]);
    status = put_map(f, p, &map, i == slices - 1);
    pk_put(f, "unset label 1\nunset label 2\n");
    map.left += map.width + SLICE_GAP;
  }
  pk_put(f, "unset multiplot\n");
  return status;
}

static picket_status draw_channel(pk_figure *f) {
  int slices = f->problem->channel.slices;
  palette p;
  picket_status status = palette_make(f, &p);
  if (status == PICKET_OK) {
    status = draw_slices(f, &p, slices < MOST_SLICES ? slices : MOST_SLICES);
    palette_free(f->result->context, &p);
  }
  return status;
}

picket_status pk_figure_problem(pk_figure *f) {
  const pk_problem *problem = f->problem;
  if (problem->has_cell) {
    pk_map map = map_of_cell(&problem->cell);
    return draw_one(f, &map, "One period of the guide as the file says it");
  }
  if (problem->channel.given) {
    return draw_channel(f);
  }
  if (problem->section.given) {
    pk_map map = pk_map_of_section(&problem->section, MAP_LEFT, TOP, MAP_WIDTH, MAP_HEIGHT);
    return draw_one(f, &map, "The section as the file says it");
  }
  return pk_fail(f->result->context, PICKET_ERROR_UNSUPPORTED,
                 "figure: the file has no cell, section or channel to draw");
}
