/* See figure_script.h. What a terminal is asked for, in the words of gnuplot 5.4. */
#include "io/figure_script.h"

#include <stdarg.h>
#include <stdio.h>

enum { PIECE = 512, TITLE_TOP = 24, SHOWS_TOP = 47, TEXT_LINE = 18, TEXT_BOTTOM = 14 };

void pk_put(pk_figure *f, const char *format, ...) {
  char piece[PIECE];
  va_list arguments;
  va_start(arguments, format);
  int length = vsnprintf(piece, sizeof piece, format, arguments);
  va_end(arguments);
  append(&f->s, piece, (size_t)(length < PIECE ? length : PIECE - 1));
}

void pk_put_value(pk_figure *f, double value) {
  char digits[PK_NUMBER_TEXT] = "NaN";
  if (isfinite(value)) {
    pk_number_write(value, digits);
  }
  pk_put(f, " %s", digits);
}

void pk_put_bar(pk_figure *f, picket_quantity quantity, double scale) {
  pk_put_value(f, scale * quantity.value);
  pk_put_value(f, scale * quantity.uncertainty);
}

/* Bytes of the UTF-8 character at `text`, 0 if there is none that an XML document may hold.
 * `code` receives it. */
static int character(const unsigned char *text, unsigned *code) {
  int bytes = text[0] < 0x80   ? 1
              : text[0] < 0xc2 ? 0
              : text[0] < 0xe0 ? 2
              : text[0] < 0xf0 ? 3
              : text[0] < 0xf5 ? 4
                               : 0;
  static const unsigned lead[] = {0, 0x7f, 0x1f, 0x0f, 0x07};
  static const unsigned least[] = {0, 0, 0x80, 0x800, 0x10000};
  *code = text[0] & lead[bytes];
  for (int i = 1; i < bytes; i++) {
    if ((text[i] & 0xc0) != 0x80) {
      return 0;
    }
    *code = *code << 6 | (text[i] & 0x3fu);
  }
  bool good = bytes > 0 && *code >= least[bytes] && *code <= 0x10ffff &&
              (*code < 0xd800 || *code > 0xdfff) && *code != 0xfffe && *code != 0xffff;
  return good ? bytes : 0;
}

/* Not shown as it is: controls, and marks that turn the direction of writing. */
static bool is_hidden(unsigned code) {
  return code < 0x20 || (code >= 0x7f && code < 0xa0) || (code >= 0x2028 && code <= 0x202e) ||
         (code >= 0x2066 && code <= 0x2069);
}

/* Bytes of a double-quoted string of gnuplot: whatever could mean anything there (quotes,
 * backslashes, backquotes that run commands, @ that expands macros) is an octal escape. Single
 * quotes would not do: one that is doubled at the beginning of a string ends it. */
static void put_bytes(pk_figure *f, const char *bytes, int count) {
  static const char plain[] =
      " abcdefghijklmnopqrstuvwxyzABCDEFGHIJKLMNOPQRSTUVWXYZ0123456789./_-+,:;=()<>";
  for (int i = 0; i < count; i++) {
    unsigned char byte = (unsigned char)bytes[i];
    /* gnuplot reads digits behind an escape as part of it. */
    bool digit = f->after_escape && byte >= '0' && byte <= '7';
    f->after_escape = byte < 0x80 && (digit || !strchr(plain, byte));
    if (f->after_escape) {
      pk_put(f, "\\%03o", byte);
    } else {
      append(&f->s, bytes + i, 1);
    }
  }
}

/* One character, or what stands for it; how many bytes of the text it was. */
static int put_character(pk_figure *f, const char *text) {
  char shown[16];
  unsigned code = 0;
  int bytes = character((const unsigned char *)text, &code);
  int length = 0;
  if (bytes == 0) {
    length = snprintf(shown, sizeof shown, "\\x%02x", (unsigned char)text[0]);
  } else if (code == '\n' || code == '\r' || code == '\t') {
    length = snprintf(shown, sizeof shown, "\\%c", code == '\n' ? 'n' : code == '\r' ? 'r' : 't');
  } else if (is_hidden(code)) {
    length = snprintf(shown, sizeof shown, "\\u%04x", code);
  }
  put_bytes(f, length ? shown : text, length ? length : bytes);
  if (code == '%' && f->in_format) {
    put_bytes(f, "%", 1);
  }
  return bytes > 0 ? bytes : 1;
}

void pk_put_text(pk_figure *f, const char *before, const char *text, int most) {
  pk_put(f, "\"");
  f->after_escape = false;
  put_bytes(f, before, (int)strlen(before));
  int shown = 0;
  for (; *text && shown < most; shown++) {
    if (shown >= 2 && memcmp(text - 2, "]]>", 3) == 0) {
      put_bytes(f, "\xe2\x81\xa0", 3); /* an unseen joint: XML allows no ]]> in texts */
    }
    text += put_character(f, text);
  }
  pk_put(f, "%s\"", *text ? "…" : "");
}

/* Where the script puts the picture. A relative name gets "./" in front: one that begins with |
 * would be a command and one with ~ a home. */
static void put_output(pk_figure *f) {
  const char *name = f->options->output;
  if (name) {
    pk_put(f, "set output \"%s", name[0] == '/' ? "" : "./");
    f->after_escape = false;
    put_bytes(f, name, (int)strlen(name));
    pk_put(f, "\"\n");
  }
}

static void put_terminal(pk_figure *f) {
  int width = PK_FIGURE_WIDTH, height = f->height;
  switch (f->options->format) {
    case PICKET_FIGURE_SVG:
      pk_put(f,
             "set terminal svg noenhanced size %d,%d font 'DejaVu Sans,13' background '#ffffff'\n",
             width, height);
      break;
    case PICKET_FIGURE_PNG: /* twice as fine as a screen, and as large on it */
      pk_put(f,
             "set terminal pngcairo noenhanced size %d,%d font 'DejaVu Sans,13' fontscale 1.5 "
             "linewidth 2 pointscale 2 background '#ffffff'\n",
             2 * width, 2 * height);
      break;
    case PICKET_FIGURE_PDF: /* 100 dots to an inch; fonts are in points of 1/72 inch */
      pk_put(f,
             "set terminal pdfcairo noenhanced size %.2f,%.2f font 'DejaVu Sans,13' fontscale 0.72 "
             "background '#ffffff'\n",
             width / 100.0, height / 100.0);
      break;
  }
  put_output(f);
}

void pk_figure_open(pk_figure *f, const char *shows, int height) {
  f->height = height;
  pk_put(f, "# Made by Picket " PICKET_VERSION
            ", for gnuplot 5.4 or later: gnuplot -d THIS_FILE\n"
            "reset\nset encoding utf8\nset decimalsign '.'\nset samples 2\n");
  put_terminal(f);
  pk_put(f, "set border 3 lc rgb '" PK_FAINT
            "'\nset tics nomirror out scale 0.6 textcolor rgb '" PK_INK
            "'\nset key noautotitle off\nset style fill solid 1 noborder\nset style arrow 9 heads "
            "size screen 0.004,90 lw 1.2\n"
            "set termoption noenhanced\n");
  bool named = f->result->name[0] != '\0';
  if (named) {
    pk_put(f, "set label 1 ");
    pk_put_text(f, "", f->result->name, PK_LABEL_MOST);
    pk_put(f, " at screen %.4f,%.4f left noenhanced font ',15' textcolor rgb '" PK_INK "'\n",
           20.0 / PK_FIGURE_WIDTH, 1 - (double)TITLE_TOP / height);
  }
  pk_put(f, "set label 2 ");
  pk_put_text(f, f->result->complete ? "" : "PARTIAL RESULT. ", shows, PK_LABEL_MOST);
  pk_put(f, " at screen %.4f,%.4f left noenhanced textcolor rgb '" PK_FAINT "'\n",
         20.0 / PK_FIGURE_WIDTH, 1 - (double)(named ? SHOWS_TOP : TITLE_TOP) / height);
}

void pk_figure_say(pk_figure *f, int rows, const char *text) {
  int above = TEXT_BOTTOM + TEXT_LINE * (rows - 1 - f->line);
  pk_put(f, "set label %d ", 100 + f->line);
  pk_put_text(f, "", text, PK_LINE_MOST);
  pk_put(f, " at screen %.4f,%.4f left noenhanced font ',11.5' textcolor rgb '" PK_INK "'\n",
         20.0 / PK_FIGURE_WIDTH, (double)above / f->height);
  f->line++;
}

void pk_figure_said(pk_figure *f) {
  pk_put(f, "unset label 1\nunset label 2\n");
  for (int i = 0; i < f->line; i++) {
    pk_put(f, "unset label %d\n", 100 + i);
  }
  f->line = 0;
}

void pk_figure_range(pk_figure *f, bool any) {
  pk_put(f,
         any ? "set yrange [*:*]\nunset label 90\n"
             : "set yrange [0:1]\nset label 90 'no values' at graph 0.5,0.5 center textcolor rgb "
               "'" PK_FAINT "'\n");
}

void pk_figure_place(pk_figure *f, int left, int right, int top, int bottom) {
  pk_put(f,
         "set lmargin at screen %.4f\nset rmargin at screen %.4f\nset tmargin at screen %.4f\n"
         "set bmargin at screen %.4f\n",
         (double)left / PK_FIGURE_WIDTH, (double)right / PK_FIGURE_WIDTH,
         1 - (double)top / f->height, 1 - (double)bottom / f->height);
}

void pk_figure_tics(pk_figure *f, const char *axis, double from, double to, int dots) {
  int room = axis[0] == 'x' ? 52 : 34; /* dots that a number and its distance take */
  double least = (to - from) * room / dots;
  double step = pow(10, floor(log10(least)));
  step *= least <= step ? 1 : least <= 2 * step ? 2 : least <= 5 * step ? 5 : 10;
  pk_put(f, "set %stics %.10g\n", axis, step);
}

const char *pk_figure_look(int i) {
  /* From dark to light, each with its own dashes and its own mark. */
  static const char *const look[PK_CURVES] = {
      "lc rgb '#16325c' lw 1.6 dt 1 pt 7 ps 0.45",
      "lc rgb '#c8761a' lw 1.6 dt (9,4) pt 4 ps 0.6",
      "lc rgb '#3f8fb5' lw 1.6 dt (9,3,2,3) pt 8 ps 0.65",
      "lc rgb '#7a3b69' lw 1.6 dt (4,3) pt 12 ps 0.65",
      "lc rgb '#5c7a29' lw 1.6 dt (12,3,2,3,2,3) pt 2 ps 0.6",
      "lc rgb '#6b6b6b' lw 1.6 dt (2,3) pt 1 ps 0.6"};
  return look[i % PK_CURVES];
}

pk_words pk_figure_quantity(picket_quantity quantity, double scale) {
  pk_words words = {"none"};
  double value = scale * quantity.value, bar = fabs(scale * quantity.uncertainty);
  if (!isfinite(value)) {
    return words;
  }
  if (!isfinite(bar)) {
    snprintf(words.text, sizeof words.text, "%.8g ± ?", value);
    return words;
  }
  if (bar == 0) {
    snprintf(words.text, sizeof words.text, "%.10g ± 0", value);
    return words;
  }
  int decimals = 1 - (int)floor(log10(bar)); /* two digits of the bar */
  if (decimals > 12 || decimals < 0 || fabs(value) > 1e12) {
    snprintf(words.text, sizeof words.text, "%.12g ± %.2g", value, bar);
  } else if (decimals > 6) { /* more zeros than are easily counted */
    snprintf(words.text, sizeof words.text, "%.*f ± %.1e", decimals, value, bar);
  } else {
    double unit = pow(10, -decimals);
    bar = ceil(bar / unit * (1 - 1e-12)) * unit;
    snprintf(words.text, sizeof words.text, "%.*f ± %.*f", decimals, value, decimals, bar);
  }
  return words;
}

bool pk_figure_light(const pk_problem *problem, double *from_nm, double *to_nm) {
  const pk_light *light = &problem->light;
  if (!light->given || light->count == 0) {
    return false;
  }
  *from_nm = PK_NM_OF_UM * light->wavelength_um[0];
  *to_nm = PK_NM_OF_UM * light->wavelength_um[light->count - 1];
  return true;
}
