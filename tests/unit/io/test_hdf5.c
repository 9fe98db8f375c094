/* Files of mode fields: when they appear, and when they must not. What is in them is read by
 * tests/cli/test_fields.py. */
#include <dirent.h>
#include <errno.h>
#include <picket.h>
#include <signal.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/resource.h>
#include <sys/stat.h>
#include <unistd.h>

#include "io/field_file.h"
#include "unit/near.h"
#include "unit/short_memory.h"

static const char STACK[] =
    "format: 1\n"
    "materials: {core: {constant: {index: 3.476}}, oxide: {constant: {index: 1.444}}}\n"
    "light: {wavelength_nm: [1500.5, 1550], polarization: hy}\n"
    "cell: {pitch_nm: 200, cladding: oxide, lateral: uniform, shapes: [{stripe: {fill: core, "
    "across: z, from_nm: -50, to_nm: 50}}]}\n";

enum { NAME = 200 };
static char folder[NAME];
static picket_context *context;
static picket_problem *problem;
static picket_options rough;

static int set_up(void **state) {
  (void)state;
  snprintf(folder, sizeof folder, "/tmp/picket-fields-XXXXXX");
  picket_options_init(&rough);
  rough.accuracy = 1e-2;
  if (!mkdtemp(folder) || picket_context_create(NULL, &context) != PICKET_OK) {
    return -1;
  }
  return picket_problem_read_text(context, STACK, strlen(STACK), "test", &problem);
}

/* Names in the folder; each is removed if `clear`. */
static int files(bool clear) {
  int count = 0;
  DIR *all = opendir(folder);
  for (struct dirent *entry; all && (entry = readdir(all)) != NULL;) {
    char name[2 * NAME + 60];
    snprintf(name, sizeof name, "%s/%s", folder, entry->d_name);
    if (entry->d_name[0] != '.') {
      count++;
      if (clear) {
        (void)!remove(name);
      }
    }
  }
  if (all) {
    closedir(all);
  }
  return count;
}

static int tear_down(void **state) {
  (void)state;
  picket_problem_free(problem);
  picket_context_free(context);
  files(true);
  return rmdir(folder);
}

static const char *in_folder(const char *name) {
  static char path[2 * NAME];
  snprintf(path, sizeof path, "%s/%s", folder, name);
  return path;
}

static char *bytes_of(const char *path, size_t *length) {
  struct stat about;
  FILE *file = fopen(path, "rb");
  assert_non_null(file);
  assert_int_equal(fstat(fileno(file), &about), 0);
  *length = (size_t)about.st_size;
  char *bytes = malloc(*length + 1);
  assert_non_null(bytes);
  assert_int_equal(fread(bytes, 1, *length, file), *length);
  fclose(file);
  return bytes;
}

static void the_same_problem_gives_the_same_bytes(void **state) {
  (void)state;
  size_t length[2];
  char *bytes[2];
  for (int i = 0; i < 2; i++) { /* the second takes the place of the first */
    assert_int_equal(picket_fields_write(problem, &rough, in_folder("same.h5")), PICKET_OK);
    bytes[i] = bytes_of(in_folder("same.h5"), &length[i]);
  }
  assert_int_equal(length[0], length[1]);
  assert_true(length[0] > 1000);
  assert_memory_equal(bytes[0], bytes[1], length[0]);
  assert_memory_equal(bytes[0] + 1, "HDF", 3);
  free(bytes[0]);
  free(bytes[1]);
  assert_int_equal(files(true), 1);
}

static void permissions_are_the_usual_ones(void **state) {
  (void)state;
  struct stat about;
  mode_t before = umask(027);
  assert_int_equal(picket_fields_write(problem, &rough, in_folder("mode.h5")), PICKET_OK);
  umask(before);
  assert_int_equal(stat(in_folder("mode.h5"), &about), 0);
  assert_int_equal(about.st_mode & 0777, 0640);
  files(true);
}

static void a_link_stays_a_link(void **state) {
  (void)state;
  struct stat about;
  FILE *file = fopen(in_folder("real.h5"), "w");
  assert_non_null(file);
  fclose(file);
  assert_int_equal(symlink("real.h5", in_folder("link.h5")), 0);
  assert_int_equal(picket_fields_write(problem, &rough, in_folder("link.h5")), PICKET_OK);
  assert_int_equal(lstat(in_folder("link.h5"), &about), 0);
  assert_true(S_ISLNK(about.st_mode));
  assert_int_equal(stat(in_folder("real.h5"), &about), 0);
  assert_true(about.st_size > 1000);
  assert_int_equal(files(true), 2);
}

static void unwritable_paths_are_refused(void **state) {
  (void)state;
  const char *const bad[] = {"/no/such/folder/a.h5", folder, "/dev/null"};
  char longest[5000];
  memset(longest, 'a', sizeof longest - 1);
  longest[sizeof longest - 1] = '\0';
  for (int i = 0; i < 4; i++) {
    const char *path = i < 3 ? bad[i] : longest;
    assert_int_equal(picket_fields_write(problem, &rough, path), PICKET_ERROR_OUTPUT);
    assert_memory_equal(picket_context_message(context), path, i < 3 ? strlen(path) : 300);
  }
  assert_int_equal(files(true), 0);
}

/* The problem is sound, but nothing can be computed: nothing is left, and what was there stays. */
static void a_failure_leaves_nothing(void **state) {
  (void)state;
  FILE *file = fopen(in_folder("old.h5"), "w");
  assert_non_null(file);
  fputs("old", file);
  fclose(file);
  assert_int_equal(picket_problem_set(problem, "materials.core", "{catalogue: silicon}"),
                   PICKET_OK);
  assert_int_equal(picket_problem_set(problem, "light.wavelength_nm", "200"), PICKET_OK);
  assert_int_equal(picket_fields_write(problem, &rough, in_folder("old.h5")), PICKET_ERROR_RANGE);
  size_t length;
  char *bytes = bytes_of(in_folder("old.h5"), &length);
  assert_int_equal(length, 3);
  free(bytes);
  assert_int_equal(files(true), 1);
}

/* A disk that is full, by a limit on the size of files. The end of this program is a part of the
 * test: HDF5 tidies up there. */
static void a_full_disk_is_reported(void **state) {
  (void)state;
  struct rlimit before, small;
  assert_int_equal(getrlimit(RLIMIT_FSIZE, &before), 0);
  void (*handler)(int) = signal(SIGXFSZ, SIG_IGN);
  for (rlim_t size = 0; size < 4000; size += 800) {
    small = before;
    small.rlim_cur = size;
    assert_int_equal(setrlimit(RLIMIT_FSIZE, &small), 0);
    picket_status status = picket_fields_write(problem, &rough, in_folder("full.h5"));
    assert_int_equal(setrlimit(RLIMIT_FSIZE, &before), 0);
    assert_int_equal(status, PICKET_ERROR_OUTPUT);
    assert_non_null(strstr(picket_context_message(context), "cannot be written"));
    assert_int_equal(files(true), 0);
  }
  signal(SIGXFSZ, handler);
  /* and afterwards all is well */
  assert_int_equal(picket_fields_write(problem, &rough, in_folder("full.h5")), PICKET_OK);
  assert_int_equal(files(true), 1);
}

/* Writes with the n-th allocation failing (0: none); says how many there were. */
static picket_status short_of_memory(long n, long *asked) {
  short_memory memory = {0};
  picket_context *c = short_memory_context(&memory);
  picket_problem *p = NULL;
  assert_int_equal(picket_problem_read_text(c, STACK, strlen(STACK), "test", &p), PICKET_OK);
  assert_int_equal(picket_problem_check(p), PICKET_OK);
  *asked = memory.asked;
  memory.fail_at = n > 0 ? memory.asked + n : 0;
  picket_status status = picket_fields_write(p, &rough, in_folder("memory.h5"));
  *asked = memory.asked - *asked;
  assert_int_equal(files(true), status == PICKET_OK ? 1 : 0);
  picket_problem_free(p);
  picket_context_free(c);
  assert_int_equal(memory.living, 0);
  return status;
}

/* The first and the last ones, where this file works, and samples in between, where a solve goes on
 * that has its own tests. */
static void allocations_may_fail(void **state) {
  (void)state;
  long all, asked;
  assert_int_equal(short_of_memory(0, &all), PICKET_OK);
  for (long n = 1; n <= all; n += n < 10 || n + 20 > all ? 1 : n / 10) {
    assert_int_equal(short_of_memory(n, &asked), PICKET_ERROR_MEMORY);
  }
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test_setup_teardown(the_same_problem_gives_the_same_bytes, set_up, tear_down),
      cmocka_unit_test_setup_teardown(permissions_are_the_usual_ones, set_up, tear_down),
      cmocka_unit_test_setup_teardown(a_link_stays_a_link, set_up, tear_down),
      cmocka_unit_test_setup_teardown(unwritable_paths_are_refused, set_up, tear_down),
      cmocka_unit_test_setup_teardown(a_failure_leaves_nothing, set_up, tear_down),
      cmocka_unit_test_setup_teardown(a_full_disk_is_reported, set_up, tear_down),
      cmocka_unit_test_setup_teardown(allocations_may_fail, set_up, tear_down),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
