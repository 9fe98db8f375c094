// The Bloch index of a problem file over its wavelengths, in C++: objects let go of themselves, failures are exceptions.
//   c3_index FILE.yaml
#include <cmath>
#include <cstdio>
#include <memory>
#include <picket.h>
#include <stdexcept>
#include <string>

namespace {

using Context = std::unique_ptr<picket_context, decltype(&picket_context_free)>;
using Problem = std::unique_ptr<picket_problem, decltype(&picket_problem_free)>;
using Result = std::unique_ptr<picket_result, decltype(&picket_result_free)>;

void check(picket_status status, const picket_context *context) {
  if (status != PICKET_OK) {
    const char *message = picket_context_message(context);
    throw std::runtime_error(std::string(picket_status_name(status)) + ": " +
                             (*message ? message : picket_status_text(status)));
  }
}

Context make_context() {
  picket_context *context = nullptr;
  check(picket_context_create(nullptr, &context), nullptr);
  return {context, picket_context_free};
}

Problem read(const Context &context, const char *path) {
  picket_problem *problem = nullptr;
  check(picket_problem_read_file(context.get(), path, &problem), context.get());
  return {problem, picket_problem_free};
}

Result find_index(const Context &context, const Problem &problem) {
  picket_options options;
  picket_options_init(&options);
  options.accuracy = 1e-3;
  picket_result *result = nullptr;
  check(picket_index_find(problem.get(), &options, &result), context.get());
  return {result, picket_result_free};
}

void print(const picket_index_answer &answer) {
  for (int i = 0; i < answer.point_count; i++) {
    const picket_index_point &point = answer.points[i];
    if (point.mode_count == 0) {
      std::printf("%.4f um: %s\n", point.wavelength_um, point.note ? point.note : "no mode");
      continue;
    }
    const picket_quantity &index = point.modes[0].bloch_index, &group = point.modes[0].group_index;
    std::printf("%.4f um: index %.5f +- %.5f, group index %.4f\n", point.wavelength_um, index.value,
                index.uncertainty, group.value);
  }
}

} // namespace

int main(int count, char **words) {
  try {
    const Context context = make_context();
    const Problem problem = read(context, count > 1 ? words[1] : "bus_section.yaml");
    const Result result = find_index(context, problem);
    for (int i = 0; i < picket_index_count(result.get()); i++) {
      picket_index_answer answer;
      check(picket_index_get(result.get(), i, &answer), context.get());
      print(answer);
    }
  } catch (const std::exception &failure) {
    std::fprintf(stderr, "%s\n", failure.what());
    return 1;
  }
  return 0;
}
