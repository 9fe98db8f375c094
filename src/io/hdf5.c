/* Mode fields as an HDF5 file (field_file.h), the only user of HDF5.
 *
 *   /                          what the file is, its conventions, the version that wrote it
 *   /hy/1550nm                 `note` where there is no mode
 *   /hy/1550nm/mode0           attributes of the mode (put_about)
 *   /hy/1550nm/mode0/Hy ...    components [nz][nx], x fastest, with unit and description
 *   /hy/1550nm/mode0/permittivity, z_um [nz], x_um [nx]
 *
 *   /section/1550nm/mode0      of a section instead: components [nx][ny], y fastest, on places of
 *                              their own, permittivity_xx, _yy, _zz, x_lines_um, x_middles_um,
 *                              y_lines_um, y_middles_um
 *
 * Complex numbers are compounds {r, i} of doubles, which Python reads as complex. Numbers are
 * little endian and no times are kept, so the same fields give the same bytes. HDF5 puts the file
 * together in its own memory and the bytes are written here: a file of its own that cannot be
 * finished, on a full disk, it keeps half closed and crashes on at the end of the process (seen
 * with 1.10). Its state is one for the process, so one lock lets one thread in at a time. */
#define _XOPEN_SOURCE 700 /* realpath */
#include <errno.h>
#include <fcntl.h>
#include <hdf5.h>
#include <limits.h>
#include <math.h>
#include <pthread.h>
#include <stdbool.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

#include "base/memory.h"
#include "io/field_file.h"
#include "io/field_text.h"
#include "io/number.h"
#include "io/write.h"

enum { NAME_BYTES = 64, TRIES = 100, GROWTH = 1 << 20 /* of the file in memory, bytes */ };
static const double TWO_PI = 6.283185307179586477;

struct pk_field_file {
  picket_context *context; /* borrowed */
  hid_t file, complex_type;
  int descriptor; /* of the temporary file; -1: none */
  bool made;      /* there is a temporary file */
  char name[PATH_MAX], temporary[PATH_MAX];
};

/* --- One at a time, and silently ---------------------------------------------------------------
 */

typedef struct quiet {
  H5E_auto2_t print;
  void *user;
} quiet;

static pthread_mutex_t one_at_a_time = PTHREAD_MUTEX_INITIALIZER;

/* HDF5 prints its errors unless told not to; whoever else uses it gets that back. */
static quiet enter(void) {
  quiet before = {NULL, NULL};
  pthread_mutex_lock(&one_at_a_time);
  H5Eget_auto2(H5E_DEFAULT, &before.print, &before.user);
  H5Eset_auto2(H5E_DEFAULT, NULL, NULL);
  errno = 0;
  return before;
}

static void leave(quiet before) {
  int error = errno;
  H5Eset_auto2(H5E_DEFAULT, before.print, before.user);
  pthread_mutex_unlock(&one_at_a_time);
  errno = error;
}

static picket_status unwritable(picket_context *context, const char *path) {
  char text[128];
  int error = errno;
  const char *why =
      error != 0 && strerror_r(error, text, sizeof text) == 0 ? text : "HDF5 could not write it";
  return pk_fail(context, PICKET_ERROR_OUTPUT, "%.300s cannot be written: %s", path, why);
}

/* --- Attributes and datasets -------------------------------------------------------------------
 */

/* An attribute of one value (count 0) or a few; false if it failed. */
static bool put(hid_t object, const char *name, hid_t stored, hid_t held, hsize_t count,
                const void *values) {
  hid_t space = count == 0 ? H5Screate(H5S_SCALAR) : H5Screate_simple(1, &count, NULL);
  hid_t attribute = H5Acreate2(object, name, stored, space, H5P_DEFAULT, H5P_DEFAULT);
  bool good = attribute >= 0 && H5Awrite(attribute, held, values) >= 0;
  good = (attribute < 0 || H5Aclose(attribute) >= 0) && good;
  return H5Sclose(space) >= 0 && good;
}

static bool put_text(hid_t object, const char *name, const char *text) {
  hid_t type = H5Tcopy(H5T_C_S1);
  bool good = H5Tset_size(type, H5T_VARIABLE) >= 0 && H5Tset_cset(type, H5T_CSET_UTF8) >= 0 &&
              put(object, name, type, type, 0, &text);
  return H5Tclose(type) >= 0 && good;
}

static bool put_number(hid_t object, const char *name, double value) {
  return put(object, name, H5T_IEEE_F64LE, H5T_NATIVE_DOUBLE, 0, &value);
}

/* {r, i}: the same bytes in memory and in the file where doubles are little endian. */
static hid_t complex_of(hid_t part) {
  hid_t type = H5Tcreate(H5T_COMPOUND, 2 * sizeof(double));
  if (type >= 0 &&
      (H5Tinsert(type, "r", 0, part) < 0 || H5Tinsert(type, "i", sizeof(double), part) < 0)) {
    H5Tclose(type);
    return -1;
  }
  return type;
}

/* Values of any type that HDF5 converts from `held`; axes may be null. */
static bool put_array(hid_t group, const char *name, hid_t stored, hid_t held, int rank,
                      const hsize_t *size, const void *values, const char *unit,
                      const char *description, const char *axes) {
  hid_t plan = H5Pcreate(H5P_DATASET_CREATE);
  hid_t space = H5Screate_simple(rank, size, NULL);
  hid_t set = -1;
  if (H5Pset_obj_track_times(plan, false) >= 0) {
    set = H5Dcreate2(group, name, stored, space, H5P_DEFAULT, plan, H5P_DEFAULT);
  }
  bool good = set >= 0 && H5Dwrite(set, held, H5S_ALL, H5S_ALL, H5P_DEFAULT, values) >= 0 &&
              put_text(set, "unit", unit) && put_text(set, "description", description) &&
              (!axes || put_text(set, "axes", axes));
  good = (set < 0 || H5Dclose(set) >= 0) && good;
  good = H5Sclose(space) >= 0 && good;
  return H5Pclose(plan) >= 0 && good;
}

/* A group, made if it is not there; negative if that failed. */
static hid_t group_of(hid_t parent, const char *name) {
  htri_t there = H5Lexists(parent, name, H5P_DEFAULT);
  if (there < 0) {
    return -1;
  }
  return there > 0 ? H5Gopen2(parent, name, H5P_DEFAULT)
                   : H5Gcreate2(parent, name, H5P_DEFAULT, H5P_DEFAULT, H5P_DEFAULT);
}

/* Within 1e-9 nm: takes the rounding of nm / 1000 away, and the name of the group is short. */
static double clean_nm(double wavelength_um) {
  return round(PK_NM_OF_UM * wavelength_um * 1e9) / 1e9;
}

/* The group of a wavelength below that of a polarization, or of the section. */
static hid_t wavelength_group(const pk_field_file *file, const char *word, double wavelength_um) {
  char number[PK_NUMBER_TEXT], name[NAME_BYTES];
  pk_number_write(clean_nm(wavelength_um), number);
  snprintf(name, sizeof name, "%snm", number);
  hid_t parent = group_of(file->file, word);
  hid_t group = parent < 0 ? -1 : group_of(parent, name);
  if (parent >= 0) {
    H5Gclose(parent);
  }
  return group;
}

/* --- A field -----------------------------------------------------------------------------------
 */

static bool put_about(const pk_field_file *file, hid_t group, const picket_field *field) {
  const picket_field_description *a = &field->about;
  double reliable[2] = {a->x_from_um, a->x_to_um};
  double index[2] = {a->index_re, a->index_im};
  double k[2] = {TWO_PI / a->wavelength_um * a->index_re, TWO_PI / a->wavelength_um * a->index_im};
  const char *power = field->nx > 1 ? PK_UNIT_POWER : PK_UNIT_DENSITY;
  return put_text(group, "polarization", pk_word_polarization(a->polarization)) &&
         put_number(group, "wavelength_nm", clean_nm(a->wavelength_um)) &&
         put(group, "order", H5T_STD_I32LE, H5T_NATIVE_INT, 0, &a->order) &&
         put_number(group, "pitch_um", a->pitch_um) &&
         put(group, "bloch_index", file->complex_type, file->complex_type, 0, index) &&
         put(group, "k_per_um", file->complex_type, file->complex_type, 0, k) &&
         put(group, "reliable_x_um", H5T_IEEE_F64LE, H5T_NATIVE_DOUBLE, 2, reliable) &&
         put_text(group, "normalisation", a->propagates ? power : PK_UNIT_PEAK);
}

static bool put_lines(hid_t group, const picket_field *field) {
  hsize_t nz = (hsize_t)field->nz, nx = (hsize_t)field->nx;
  return put_array(group, "z_um", H5T_IEEE_F64LE, H5T_NATIVE_DOUBLE, 1, &nz, field->z, "um",
                   "lines along the guide, both ends of the pitch among them", NULL) &&
         put_array(group, "x_um", H5T_IEEE_F64LE, H5T_NATIVE_DOUBLE, 1, &nx, field->x, "um",
                   "lines across the guide; one at 0 where nothing varies along x", NULL);
}

static bool put_values(const pk_field_file *file, hid_t group, const picket_field *field) {
  hsize_t size[2] = {(hsize_t)field->nz, (hsize_t)field->nx};
  bool good =
      put_array(group, "permittivity", file->complex_type, file->complex_type, 2, size,
                field->permittivity, "1", "relative permittivity around each node", "z_um, x_um");
  for (int c = PICKET_COMPONENT_EX; good && c <= PICKET_COMPONENT_HZ; c++) {
    picket_component which = (picket_component)c;
    const double complex *values = pk_mode_field_values(field, which);
    if (values) {
      good = put_array(group, picket_component_name(which), file->complex_type, file->complex_type,
                       2, size, values, picket_component_unit(which),
                       "periodic part: times exp(i k_per_um z_um) it is the field", "z_um, x_um");
    }
  }
  return good;
}

typedef bool (*put_contents)(const pk_field_file *file, hid_t group, const void *field);

/* Wavelengths closer than the digits of their names share a group: the first one stays. */
static bool put_mode(const pk_field_file *file, hid_t parent, int order, put_contents put_all,
                     const void *field) {
  char name[NAME_BYTES];
  snprintf(name, sizeof name, "mode%d", order);
  htri_t there = H5Lexists(parent, name, H5P_DEFAULT);
  if (there != 0) {
    return there > 0;
  }
  hid_t group = group_of(parent, name);
  bool good = group >= 0 && put_all(file, group, field);
  return (group < 0 || H5Gclose(group) >= 0) && good;
}

static picket_status add(pk_field_file *file, const char *word, double wavelength_um, int order,
                         put_contents put_all, const void *field) {
  quiet before = enter();
  hid_t parent = wavelength_group(file, word, wavelength_um);
  bool good = parent >= 0 && put_mode(file, parent, order, put_all, field);
  good = (parent < 0 || H5Gclose(parent) >= 0) && good;
  leave(before);
  return good ? PICKET_OK : unwritable(file->context, file->name);
}

static picket_status miss(pk_field_file *file, const char *word, double wavelength_um,
                          const char *why) {
  quiet before = enter();
  hid_t group = wavelength_group(file, word, wavelength_um);
  bool good = group >= 0;
  if (good && H5Aexists(group, "note") == 0) {
    good = put_text(group, "note", why);
  }
  good = (group < 0 || H5Gclose(group) >= 0) && good;
  leave(before);
  return good ? PICKET_OK : unwritable(file->context, file->name);
}

static bool put_bloch(const pk_field_file *file, hid_t group, const void *field) {
  return put_about(file, group, field) && put_lines(group, field) && put_values(file, group, field);
}

picket_status pk_field_file_add(pk_field_file *file, const picket_field *field) {
  return add(file, pk_word_polarization(field->about.polarization), field->about.wavelength_um,
             field->about.order, put_bloch, field);
}

picket_status pk_field_file_miss(pk_field_file *file, pk_polarization polarization,
                                 double wavelength_um, const char *why) {
  return miss(file, pk_word_polarization((picket_polarization)polarization), wavelength_um, why);
}

/* --- A field of a section ----------------------------------------------------------------------
 */

static bool put_section_about(const pk_field_file *file, hid_t group,
                              const picket_section_field_description *a) {
  double x[2] = {a->x_from_um, a->x_to_um}, y[2] = {a->y_from_um, a->y_to_um};
  double k0 = TWO_PI / a->wavelength_um;
  double index[2] = {a->index_re, a->index_im}, k[2] = {k0 * a->index_re, k0 * a->index_im};
  return put_number(group, "wavelength_nm", clean_nm(a->wavelength_um)) &&
         put(group, "order", H5T_STD_I32LE, H5T_NATIVE_INT, 0, &a->order) &&
         put(group, "index", file->complex_type, file->complex_type, 0, index) &&
         put(group, "k_per_um", file->complex_type, file->complex_type, 0, k) &&
         put(group, "reliable_x_um", H5T_IEEE_F64LE, H5T_NATIVE_DOUBLE, 2, x) &&
         put(group, "reliable_y_um", H5T_IEEE_F64LE, H5T_NATIVE_DOUBLE, 2, y) &&
         put_text(group, "normalisation", PK_UNIT_WATT);
}

static bool put_section_places(hid_t group, const pk_section_whole *w) {
  static const char *const line[2] = {"x_lines_um", "y_lines_um"};
  static const char *const middle[2] = {"x_middles_um", "y_middles_um"};
  bool good = true;
  for (int a = 0; good && a < 2; a++) {
    hsize_t lines = (hsize_t)w->lines[a], middles = lines - 1;
    good = put_array(group, line[a], H5T_IEEE_F64LE, H5T_NATIVE_DOUBLE, 1, &lines, w->line[a], "um",
                     "lines of the grid", NULL) &&
           put_array(group, middle[a], H5T_IEEE_F64LE, H5T_NATIVE_DOUBLE, 1, &middles, w->middle[a],
                     "um", "middles between the lines", NULL);
  }
  return good;
}

static bool put_section(const pk_field_file *file, hid_t group, const void *of) {
  static const char *const entry[PK_ELECTRIC] = {"permittivity_xx", "permittivity_yy",
                                                 "permittivity_zz"};
  const picket_section_field *field = of;
  const pk_section_whole *w = &field->whole;
  hid_t type = file->complex_type;
  bool good = put_section_about(file, group, &field->about) && put_section_places(group, w);
  for (int c = 0; good && c < PK_WHOLE_NAMES; c++) {
    pk_whole_name n = (pk_whole_name)c;
    picket_component which = (picket_component)c; /* in the same order */
    hsize_t size[2] = {(hsize_t)pk_whole_count(w, n, PK_U), (hsize_t)pk_whole_count(w, n, PK_V)};
    char axes[NAME_BYTES];
    snprintf(axes, sizeof axes, "x_%s_um, y_%s_um",
             pk_whole_on_middles(n, PK_U) ? "middles" : "lines",
             pk_whole_on_middles(n, PK_V) ? "middles" : "lines");
    good = put_array(group, picket_component_name(which), type, type, 2, size, w->field[c],
                     picket_component_unit(which), "times exp(i k_per_um z) it is the field", axes);
    if (good && c < PK_ELECTRIC) {
      good = put_array(group, entry[c], type, type, 2, size, field->permittivity[c], "1",
                       "relative permittivity that this component of E has", axes);
    }
  }
  return good;
}

picket_status pk_field_file_add_section(pk_field_file *file, const picket_section_field *field) {
  return add(file, "section", field->about.wavelength_um, field->about.order, put_section, field);
}

picket_status pk_field_file_miss_section(pk_field_file *file, double wavelength_um,
                                         const char *why) {
  return miss(file, "section", wavelength_um, why);
}

/* --- The file ----------------------------------------------------------------------------------
 */

/* The name behind links; a name that is taken by something else than a writable file is refused,
 * for a rename would replace it all the same. */
static picket_status find_name(pk_field_file *file, const char *path) {
  struct stat about;
  if (strlen(path) >= PATH_MAX) {
    errno = ENAMETOOLONG;
    return unwritable(file->context, path);
  }
  snprintf(file->name, sizeof file->name, "%s", path);
  if (stat(path, &about) != 0) {
    return PICKET_OK; /* what is wrong with it shows when the file is made */
  }
  if (!S_ISREG(about.st_mode)) {
    return pk_fail(file->context, PICKET_ERROR_OUTPUT,
                   "%.300s is not a plain file, which an HDF5 file must be", path);
  }
  if (access(path, W_OK) != 0 || !realpath(path, file->name)) {
    return unwritable(file->context, path);
  }
  return PICKET_OK;
}

/* A new file beside the name, with the permissions any new file of the user gets. */
static picket_status make_temporary(pk_field_file *file) {
  for (int i = 0; i < TRIES; i++) {
    int length = snprintf(file->temporary, sizeof file->temporary, "%.*s.%ld-%d.part",
                          PATH_MAX - 40, file->name, (long)getpid(), i);
    if (length >= (int)sizeof file->temporary) {
      errno = ENAMETOOLONG;
      break;
    }
    file->descriptor = open(file->temporary, O_WRONLY | O_CREAT | O_EXCL | O_CLOEXEC, 0666);
    if (file->descriptor >= 0) {
      file->made = true;
      return PICKET_OK;
    }
    if (errno != EEXIST) {
      break;
    }
  }
  return unwritable(file->context, file->name);
}

static picket_status start(pk_field_file *file, const char *name, bool section) {
  quiet before = enter();
  hid_t driver = H5Pcreate(H5P_FILE_ACCESS);
  file->complex_type = complex_of(H5T_IEEE_F64LE);
  if (H5Pset_fapl_core(driver, GROWTH, false) >= 0) {
    file->file = H5Fcreate(file->temporary, H5F_ACC_TRUNC, H5P_DEFAULT, driver);
  }
  H5Pclose(driver);
  bool good = file->complex_type >= 0 && file->file >= 0 &&
              put_text(file->file, "description", section ? PK_SECTION_WHAT : PK_FIELD_WHAT) &&
              put_text(file->file, "conventions",
                       section ? PK_SECTION_CONVENTIONS : PK_FIELD_CONVENTIONS) &&
              put_text(file->file, "name", name) &&
              put_text(file->file, "picket_version", picket_version());
  leave(before);
  return good ? PICKET_OK : unwritable(file->context, file->name);
}

picket_status pk_field_file_open(picket_context *context, const char *path, const char *name,
                                 bool section, pk_field_file **out) {
  pk_field_file *file = PK_NEW(context, 1, pk_field_file);
  if (!file) {
    return PICKET_ERROR_MEMORY;
  }
  *file = (pk_field_file){.context = context, .file = -1, .complex_type = -1, .descriptor = -1};
  picket_status status = find_name(file, path);
  if (status == PICKET_OK) {
    status = make_temporary(file);
  }
  if (status == PICKET_OK) {
    status = start(file, name, section);
  }
  if (status != PICKET_OK) {
    pk_field_file_drop(file);
    return status;
  }
  *out = file;
  return PICKET_OK;
}

/* The whole file as bytes, in the context's memory. */
static picket_status take_image(pk_field_file *file, unsigned char **out, size_t *count) {
  quiet before = enter();
  ssize_t size =
      H5Fflush(file->file, H5F_SCOPE_GLOBAL) < 0 ? -1 : H5Fget_file_image(file->file, NULL, 0);
  unsigned char *bytes = size > 0 ? PK_NEW(file->context, size, unsigned char) : NULL;
  bool good = bytes && H5Fget_file_image(file->file, bytes, (size_t)size) == size;
  leave(before);
  if (good) {
    *out = bytes;
    *count = (size_t)size;
    return PICKET_OK;
  }
  picket_status status =
      size > 0 && !bytes ? PICKET_ERROR_MEMORY : unwritable(file->context, file->name);
  pk_free(file->context, bytes);
  return status;
}

static bool write_all(int descriptor, const unsigned char *bytes, size_t count) {
  while (count > 0) {
    ssize_t written = write(descriptor, bytes, count);
    if (written < 0 && errno == EINTR) {
      continue;
    }
    if (written <= 0) {
      errno = written < 0 ? errno : ENOSPC;
      return false;
    }
    bytes += written;
    count -= (size_t)written;
  }
  return true;
}

static picket_status put_on_disk(pk_field_file *file) {
  unsigned char *bytes = NULL;
  size_t count = 0;
  picket_status status = take_image(file, &bytes, &count);
  if (status != PICKET_OK) {
    return status;
  }
  bool good = write_all(file->descriptor, bytes, count);
  if (good) {
    int descriptor = file->descriptor;
    file->descriptor = -1;
    good = close(descriptor) == 0 && rename(file->temporary, file->name) == 0;
  }
  file->made = !good;
  if (!good) {
    status = unwritable(file->context, file->name);
  }
  pk_free(file->context, bytes);
  return status;
}

picket_status pk_field_file_finish(pk_field_file *file) {
  picket_status status = put_on_disk(file);
  pk_field_file_drop(file);
  return status;
}

void pk_field_file_drop(pk_field_file *file) {
  if (!file) {
    return;
  }
  quiet before = enter();
  if (file->complex_type >= 0) {
    H5Tclose(file->complex_type);
  }
  if (file->file >= 0) {
    H5Fclose(file->file);
  }
  leave(before);
  if (file->descriptor >= 0) {
    close(file->descriptor);
  }
  if (file->made) {
    unlink(file->temporary);
  }
  pk_free(file->context, file);
}
