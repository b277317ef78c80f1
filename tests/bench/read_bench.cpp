// tests/bench/read_bench.cpp -- reading a request of 1,000,000 rows and 4 columns against the SAX parser
// alone.
//
// The parser is given the same text in memory and a handler that throws everything away; the reader takes
// it from a file through the buffer that serves a pipe, and ends with finished columns. Both are timed
// alternately and the best of each is compared, so that a busy machine disturbs both alike.
// The goal: at most 1.5 times.
#include <sys/mman.h>
#include <time.h>
#include <unistd.h>

#include <algorithm>
#include <cstdio>
#include <nlohmann/json.hpp>
#include <random>
#include <string>

#include "protocol/wire/request_reader.hpp"

namespace {

constexpr int rows = 1'000'000, rounds = 7;

struct Nothing {
  using Whole = std::int64_t;
  bool null() { return true; }
  bool boolean(bool) { return true; }
  bool number_integer(Whole) { return true; }
  bool number_unsigned(std::uint64_t) { return true; }
  bool number_float(double, const std::string&) { return true; }
  bool string(std::string&) { return true; }
  bool binary(std::vector<std::uint8_t>&) { return true; }
  bool start_object(std::size_t) { return true; }
  bool key(std::string&) { return true; }
  bool end_object() { return true; }
  bool start_array(std::size_t) { return true; }
  bool end_array() { return true; }
  bool parse_error(std::size_t, const std::string&, const nlohmann::detail::exception&) { return false; }
};

struct Cells {
  std::vector<std::string> count, exposure, material, age;
};

Cells invented_cells() {
  std::mt19937_64 random(20240101);
  std::poisson_distribution<int> count(1.3);
  std::uniform_real_distribution<double> exposure(0.05, 4);
  std::uniform_int_distribution<std::size_t> material(0, 3);
  std::uniform_int_distribution<int> age(0, 110);
  const std::string materials[] = {"\"iron\"", "\"pvc\"", "\"steel\"", "\"asbestos cement\""};
  Cells cells;
  char text[32];
  for (int i = 0; i < rows; ++i) {
    cells.count.push_back(std::to_string(count(random)));
    std::snprintf(text, sizeof text, "%.3f", exposure(random));
    cells.exposure.push_back(text);
    cells.material.push_back(materials[material(random)]);
    cells.age.push_back(std::to_string(age(random)));
  }
  return cells;
}

std::string joined(const std::vector<std::string>& cells) {
  std::string text = "[";
  for (const auto& cell : cells) text += (text.size() > 1 ? "," : "") + cell;
  return text + "]";
}

std::string as_columns(const Cells& cells) {
  return R"({"ask":"what_drives","of":{"columns":{"bursts":)" + joined(cells.count) + R"(,"km_years":)" +
         joined(cells.exposure) + R"(,"material":)" + joined(cells.material) + R"(,"age":)" +
         joined(cells.age) + R"(},"roles":{"count":"bursts","exposure":"km_years"}}})" + "\n";
}

std::string as_range(const Cells& cells) {
  std::string text = R"({"ask":"what_drives","of":{"range":[["bursts","km_years","material","age"])";
  for (std::size_t i = 0; i < rows; ++i) {
    text +=
        ",[" + cells.count[i] + "," + cells.exposure[i] + "," + cells.material[i] + "," + cells.age[i] + "]";
  }
  return text + R"(],"roles":{"count":"bursts","exposure":"km_years"}}})" + "\n";
}

template <class Task>
double seconds(Task task) {
  const auto now = [] {
    timespec time{};
    ::clock_gettime(CLOCK_THREAD_CPUTIME_ID, &time);
    return static_cast<double>(time.tv_sec) + 1e-9 * static_cast<double>(time.tv_nsec);
  };
  const double start = now();
  task();
  return now() - start;
}

bool compare(const char* name, const std::string& text) {
  const int file = ::memfd_create("request", 0);
  if (file < 0 || ::write(file, text.data(), text.size()) != static_cast<ssize_t>(text.size())) return false;
  double parser = 1e9, reader = 1e9;
  for (int round = 0; round < rounds; ++round) {
    parser = std::min(parser, seconds([&] {
                        Nothing nothing;
                        nlohmann::json::sax_parse(text.begin(), text.end() - 1, &nothing);
                      }));
    ::lseek(file, 0, SEEK_SET);
    reader = std::min(reader, seconds([&] {
                        countsel::LineSource source(file, text.size());
                        source.next_line();
                        const auto request = countsel::read_request(source);
                        if (request.trouble) std::printf("refused: %s\n", request.trouble->text.c_str());
                      }));
  }
  ::close(file);
  std::printf("%-8s %6.1f MB   parser alone %6.3f s   reader %6.3f s   ratio %.2f (at most 1.5)\n", name,
              static_cast<double>(text.size()) / 1e6, parser, reader, reader / parser);
  return reader <= 1.5 * parser;
}

}  // namespace

int main() {
  const Cells cells = invented_cells();
  const bool columns = compare("columns", as_columns(cells));
  const bool range = compare("range", as_range(cells));
  return columns && range ? 0 : 1;
}
