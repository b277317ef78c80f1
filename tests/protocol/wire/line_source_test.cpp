// tests/protocol/wire/line_source_test.cpp -- lines across buffers, marks, lengths.
#include "protocol/wire/line_source.hpp"

#include <doctest/doctest.h>
#include <sys/mman.h>
#include <unistd.h>

#include <vector>

namespace countsel {
namespace {

constexpr std::size_t endless = std::size_t{1} << 30;

/// A file that holds `text`, rewound.
struct Input {
  explicit Input(const std::string& text) : descriptor(::memfd_create("lines", 0)) {
    REQUIRE(::write(descriptor, text.data(), text.size()) == static_cast<ssize_t>(text.size()));
    ::lseek(descriptor, 0, SEEK_SET);
  }
  ~Input() { ::close(descriptor); }
  int descriptor;
};

std::string rest_of_line(LineSource& source) {
  std::string line;
  for (; !source.at_end(); source.advance()) line += source.current();
  return line;
}

/// Every line; one that is too long ends in "!".
std::vector<std::string> lines_of(const std::string& text, std::size_t longest = endless) {
  const Input input(text);
  LineSource source(input.descriptor, longest);
  std::vector<std::string> lines;
  while (source.next_line()) {
    lines.push_back(rest_of_line(source));
    if (source.line_too_long()) lines.back() += "!";
  }
  return lines;
}

using Lines = std::vector<std::string>;

TEST_CASE("lines, with and without their ends") {
  CHECK(lines_of("").empty());
  CHECK(lines_of("\n \n\t\n\r\n   ").empty());
  CHECK(lines_of("a\nb") == Lines{"a", "b"});
  CHECK(lines_of("a\n\n  b \r\n\nc\n") == Lines{"a", "b \r", "c"});
}

TEST_CASE("a byte-order mark is passed over at the very start only") {
  CHECK(lines_of("\xEF\xBB\xBF").empty());
  CHECK(lines_of("\xEF\xBB\xBF"
                 "a") == Lines{"a"});
  CHECK(lines_of("\xEF\xBB\xBF\n"
                 "a") == Lines{"a"});
  CHECK(lines_of("a\n\xEF\xBB\xBF"
                 "b") == Lines{"a",
                               "\xEF\xBB\xBF"
                               "b"});
  CHECK(lines_of("\xEF\xBB\xBF\xEF\xBB\xBF"
                 "a") == Lines{"\xEF\xBB\xBF"
                               "a"});
  CHECK(lines_of("\xEF") == Lines{"\xEF"});
  CHECK(lines_of("\xEF\xBB\n"
                 "a") == Lines{"\xEF\xBB", "a"});
}

TEST_CASE("a NUL is given as another control character") {
  CHECK(lines_of(std::string("a\0b\n\0", 5)) == Lines{"a\x01"
                                                      "b",
                                                      "\x01"});
  LineSource memory(std::string_view("a\0b", 3));
  CHECK(rest_of_line(memory) ==
        "a\x01"
        "b");
}

TEST_CASE("lines longer than the buffer, and lines across it") {
  const std::string a(300'000, 'a'), b(262'143, 'b'), c(262'144, 'c'), d(1'000'000, 'd');
  CHECK(lines_of(a + "\n" + b + "\n" + c + "\n" + d) == Lines{a, b, c, d});
}

TEST_CASE("a line may be just as long as allowed") {
  for (const std::size_t longest : {3UL, 262'144UL, 300'000UL}) {
    const std::string fits(longest, 'x'), beyond(longest + 1, 'x');
    CHECK(lines_of(fits + "\nnext", longest) == Lines{fits, longest < 4 ? "nex!" : "next"});
    CHECK(lines_of(fits, longest) == Lines{fits});
    CHECK(lines_of(beyond + "\ny", longest) == Lines{fits + "!", "y"});
    CHECK(lines_of(beyond, longest) == Lines{fits + "!"});
    CHECK(lines_of(std::string(longest + 5, ' ') + "\ny", longest) == Lines{"!", "y"});
  }
}

TEST_CASE("what is left of a line can be passed over") {
  const Input input("abc" + std::string(600'000, 'x') + "\ndef\nghi");
  LineSource source(input.descriptor, endless);
  REQUIRE(source.next_line());
  source.advance();
  source.skip_line();
  REQUIRE(source.next_line());
  CHECK(rest_of_line(source) == "def");
  REQUIRE(source.next_line());
  CHECK(source.current() == 'g');
  CHECK(!source.next_line());
}

TEST_CASE("what is read can be recorded, across buffers too") {
  const std::string text = "abc" + std::string(600'000, 'x') + "yz\n";
  const Input input(text);
  LineSource source(input.descriptor, endless);
  REQUIRE(source.next_line());
  source.advance();
  source.record();
  source.advance();
  CHECK(source.recorded() == "b");
  CHECK(source.recorded().empty());
  source.record();
  rest_of_line(source);
  CHECK(source.recorded() == text.substr(2, text.size() - 3));
}

TEST_CASE("the iterator walks one line") {
  LineSource source("ab");
  LineIterator at(source);
  const LineIterator end;
  std::string seen;
  for (; at != end; ++at) seen += *at;
  CHECK(seen == "ab");
  CHECK(at == end);
}

}  // namespace
}  // namespace countsel
