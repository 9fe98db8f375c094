/* Journals: what is added comes back, cut off at any byte; another's journal and other files are
 * refused and left alone. */
#include "study/journal.h"

#include <fcntl.h>
#include <signal.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/resource.h>
#include <sys/stat.h>
#include <sys/wait.h>
#include <unistd.h>

#include "unit/near.h"
#include "unit/short_memory.h"

enum { KEY = 77, MOST = 8, FILE_BYTES = 4096 };

static picket_context *context;
static char folder[64], path[96];

typedef struct heard {
  int count, piece[MOST];
  char answer[MOST][64];
  picket_status say;
} heard;

static picket_status hear(void *user, int piece, const char *answer) {
  heard *h = user;
  if (h->say != PICKET_OK) {
    return pk_fail(context, h->say, "said so");
  }
  assert_true(h->count < MOST);
  h->piece[h->count] = piece;
  snprintf(h->answer[h->count++], sizeof h->answer[0], "%s", answer);
  return PICKET_OK;
}

static int set_up(void **state) {
  (void)state;
  strcpy(folder, "/tmp/picket-journal-XXXXXX");
  if (!mkdtemp(folder)) {
    return -1;
  }
  snprintf(path, sizeof path, "%s/journal", folder);
  return picket_context_create(NULL, &context);
}

static int tear_down(void **state) {
  (void)state;
  picket_context_free(context);
  (void)unlink(path);
  return rmdir(folder);
}

static picket_status open_journal(uint64_t key, heard *h, pk_journal **out) {
  *h = (heard){.say = h->say};
  return pk_journal_open(context, path, key, hear, h, out);
}

static void open_good(heard *h, pk_journal **out) {
  *h = (heard){0};
  if (open_journal(KEY, h, out) != PICKET_OK) {
    fail_msg("%s", picket_context_message(context));
  }
}

static size_t contents(char out[FILE_BYTES]) {
  FILE *file = fopen(path, "rb");
  assert_non_null(file);
  size_t length = fread(out, 1, FILE_BYTES - 1, file);
  fclose(file);
  out[length] = '\0';
  return length;
}

static void put_contents(const char *bytes, size_t length) {
  FILE *file = fopen(path, "wb");
  assert_non_null(file);
  assert_int_equal(fwrite(bytes, 1, length, file), length);
  fclose(file);
}

static void write_three(void) {
  heard h;
  pk_journal *journal = NULL;
  open_good(&h, &journal);
  assert_int_equal(h.count, 0);
  assert_int_equal(pk_journal_add(journal, 2, "two 0x1p+0"), PICKET_OK);
  assert_int_equal(pk_journal_add(journal, 0, "zero"), PICKET_OK);
  assert_int_equal(pk_journal_add(journal, 7, "seven #7"), PICKET_OK);
  pk_journal_close(journal);
}

static void what_is_added_comes_back(void **state) {
  (void)state;
  heard h;
  pk_journal *journal = NULL;
  write_three();
  open_good(&h, &journal);
  pk_journal_close(journal);
  assert_int_equal(h.count, 3);
  assert_int_equal(h.piece[0], 2);
  assert_string_equal(h.answer[0], "two 0x1p+0");
  assert_string_equal(h.answer[2], "seven #7");
}

/* Cut off after any number of bytes: the whole lines come back, and what is added next too. */
static void cut_off_anywhere(void **state) {
  (void)state;
  char whole[FILE_BYTES], now[FILE_BYTES];
  write_three();
  size_t length = contents(whole);
  for (size_t cut = 0; cut <= length; cut++) {
    heard h;
    pk_journal *journal = NULL;
    int lines = 0;
    for (size_t i = 0; i < cut; i++) {
      lines += whole[i] == '\n';
    }
    put_contents(whole, cut);
    open_good(&h, &journal);
    assert_int_equal(h.count, lines > 0 ? lines - 1 : 0);
    assert_int_equal(pk_journal_add(journal, 5, "five"), PICKET_OK);
    pk_journal_close(journal);
    open_good(&h, &journal);
    pk_journal_close(journal);
    assert_int_equal(h.count, lines > 0 ? lines : 1);
    assert_string_equal(h.answer[h.count - 1], "five");
    size_t bytes = contents(now);
    assert_int_equal(bytes, strlen(now));
  }
}

static void a_damaged_line_is_left_out(void **state) {
  (void)state;
  char whole[FILE_BYTES];
  write_three();
  size_t length = contents(whole);
  char *second = strchr(whole, '\n') + 1;
  for (char *byte = second; *byte != '\n'; byte++) {
    heard h;
    pk_journal *journal = NULL;
    char kept = *byte;
    *byte = kept == 'q' ? 'r' : 'q';
    put_contents(whole, length);
    open_good(&h, &journal);
    pk_journal_close(journal);
    assert_int_equal(h.count, 2);
    assert_string_equal(h.answer[0], "zero");
    *byte = kept;
  }
}

static void a_line_without_sense_is_left_out(void **state) {
  (void)state;
  heard h = {.say = PICKET_ERROR_INTERNAL};
  pk_journal *journal = NULL;
  write_three();
  assert_int_equal(open_journal(KEY, &h, &journal), PICKET_OK);
  assert_string_equal(picket_context_message(context), "");
  pk_journal_close(journal);
  h.say = PICKET_ERROR_MEMORY;
  journal = NULL;
  assert_int_equal(open_journal(KEY, &h, &journal), PICKET_ERROR_MEMORY);
  assert_null(journal);
}

static void expect_refused(uint64_t key, picket_status status, const char *says) {
  char before[FILE_BYTES], after[FILE_BYTES];
  heard h = {0};
  pk_journal *journal = NULL;
  size_t length = contents(before);
  assert_int_equal(open_journal(key, &h, &journal), status);
  assert_null(journal);
  assert_non_null(strstr(picket_context_message(context), says));
  assert_non_null(strstr(picket_context_message(context), path));
  assert_int_equal(contents(after), length);
  assert_memory_equal(before, after, length);
}

static void what_is_not_ours_is_refused(void **state) {
  (void)state;
  write_three();
  expect_refused(KEY + 1, PICKET_ERROR_INPUT, "another problem");
  const char *foreign[] = {
      "format: 1\nname: my only copy\n",         "no line end", "\n", "picket journey\n",
      "picket journal 1 9.9.9 000000000000004d", "\0\0\0\n"};
  for (size_t i = 0; i < sizeof foreign / sizeof *foreign; i++) {
    put_contents(foreign[i], i == 5 ? 4 : strlen(foreign[i]));
    expect_refused(KEY, PICKET_ERROR_INPUT, i == 4 ? "another version" : "no journal");
  }
}

static void a_place_that_cannot_be_written(void **state) {
  (void)state;
  heard h = {0};
  pk_journal *journal = NULL;
  assert_int_equal(pk_journal_open(context, "/no/such/folder/j", KEY, hear, &h, &journal),
                   PICKET_ERROR_OUTPUT);
  assert_non_null(strstr(picket_context_message(context), "/no/such/folder/j"));
  assert_int_equal(pk_journal_open(context, folder, KEY, hear, &h, &journal), PICKET_ERROR_OUTPUT);
  assert_int_equal(mkfifo(path, 0600), 0);
  assert_int_equal(pk_journal_open(context, path, KEY, hear, &h, &journal), PICKET_ERROR_INPUT);
  assert_non_null(strstr(picket_context_message(context), "not a plain file"));
  assert_null(journal);
}

/* Another process holds it: locks are between processes. */
static void one_run_at_a_time(void **state) {
  (void)state;
  heard h;
  pk_journal *journal = NULL;
  open_good(&h, &journal);
  pid_t other = fork();
  if (other == 0) {
    pk_journal *second = NULL;
    heard none = {0};
    picket_status status = pk_journal_open(context, path, KEY, hear, &none, &second);
    bool says = strstr(picket_context_message(context), "another run") != NULL;
    _exit(status == PICKET_ERROR_OUTPUT && says ? 0 : 1);
  }
  int how = 1;
  assert_int_equal(waitpid(other, &how, 0), other);
  assert_int_equal(how, 0);
  pk_journal_close(journal);
}

/* A full disk, played by a limit on the size of files: no line is left half written. */
static void a_full_disk(void **state) {
  (void)state;
  char before[FILE_BYTES], after[FILE_BYTES];
  write_three();
  size_t length = contents(before);
  pid_t other = fork();
  if (other == 0) {
    heard h = {0};
    pk_journal *journal = NULL;
    struct rlimit limit = {length + 10, length + 10};
    struct sigaction ignore = {.sa_handler = SIG_IGN};
    sigaction(SIGXFSZ, &ignore, NULL);
    bool good = setrlimit(RLIMIT_FSIZE, &limit) == 0 &&
                open_journal(KEY, &h, &journal) == PICKET_OK &&
                pk_journal_add(journal, 1, "longer than ten bytes") == PICKET_ERROR_OUTPUT &&
                strstr(picket_context_message(context), "cannot be written") != NULL;
    _exit(good ? 0 : 1);
  }
  int how = 1;
  assert_int_equal(waitpid(other, &how, 0), other);
  assert_int_equal(how, 0);
  assert_int_equal(contents(after), length);
  assert_memory_equal(before, after, length);
}

static void every_allocation_may_fail(void **state) {
  (void)state;
  picket_context *rich = context;
  write_three();
  for (long n = 2;; n++) {
    short_memory memory = {.fail_at = n};
    heard h = {0};
    pk_journal *journal = NULL;
    context = short_memory_context(&memory);
    picket_status status = pk_journal_open(context, path, KEY, hear, &h, &journal);
    if (status == PICKET_OK) {
      status = pk_journal_add(journal, 1, "one");
    }
    pk_journal_close(journal);
    picket_context_free(context);
    assert_int_equal(memory.living, 0);
    if (memory.asked < n) {
      assert_int_equal(status, PICKET_OK);
      assert_true(n > 4);
      break;
    }
    assert_int_equal(status, PICKET_ERROR_MEMORY);
  }
  context = rich;
}

int main(void) {
  const struct CMUnitTest tests[] = {
      cmocka_unit_test_setup_teardown(what_is_added_comes_back, set_up, tear_down),
      cmocka_unit_test_setup_teardown(cut_off_anywhere, set_up, tear_down),
      cmocka_unit_test_setup_teardown(a_damaged_line_is_left_out, set_up, tear_down),
      cmocka_unit_test_setup_teardown(a_line_without_sense_is_left_out, set_up, tear_down),
      cmocka_unit_test_setup_teardown(what_is_not_ours_is_refused, set_up, tear_down),
      cmocka_unit_test_setup_teardown(a_place_that_cannot_be_written, set_up, tear_down),
      cmocka_unit_test_setup_teardown(one_run_at_a_time, set_up, tear_down),
      cmocka_unit_test_setup_teardown(a_full_disk, set_up, tear_down),
      cmocka_unit_test_setup_teardown(every_allocation_may_fail, set_up, tear_down),
  };
  return cmocka_run_group_tests(tests, NULL, NULL);
}
