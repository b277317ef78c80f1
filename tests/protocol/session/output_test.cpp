// tests/protocol/session/output_test.cpp -- replies in their order, or as they are finished.
#include "protocol/session/output.hpp"

#include <doctest/doctest.h>
#include <sys/mman.h>
#include <unistd.h>

namespace countsel {
namespace {

struct Written {
  int descriptor = ::memfd_create("replies", 0);
  ~Written() { ::close(descriptor); }
  std::string text() const {
    std::string all(static_cast<std::size_t>(::lseek(descriptor, 0, SEEK_END)), '\0');
    REQUIRE(::pread(descriptor, all.data(), all.size(), 0) == static_cast<ssize_t>(all.size()));
    return all;
  }
};

TEST_CASE("in the order of their places") {
  const Written written;
  Output output(written.descriptor);
  for (std::uint64_t place = 0; place < 4; ++place) CHECK(output.reserve() == place);
  output.reply(2, "c");
  output.reply(1, "b");
  CHECK(written.text().empty());
  output.reply(0, "a");
  CHECK(written.text() == "a\nb\nc\n");
  output.reply(3, "d");
  CHECK(written.text() == "a\nb\nc\nd\n");
}

TEST_CASE("as they are finished") {
  const Written written;
  Output output(written.descriptor);
  for (int i = 0; i < 4; ++i) output.reserve();
  output.as_finished(true);
  output.reply(2, "c");
  output.reply(0, "a");
  output.reply(3, "d");
  output.reply(1, "b");
  CHECK(written.text() == "c\na\nd\nb\n");
}

TEST_CASE("the order may change while replies are out") {
  const Written written;
  Output output(written.descriptor);
  for (int i = 0; i < 7; ++i) output.reserve();
  output.reply(3, "d");      // waits for its turn
  output.as_finished(true);  // what waited goes
  output.reply(1, "b");
  CHECK(written.text() == "d\nb\n");
  output.as_finished(false);
  output.reply(4, "e");  // waits again
  CHECK(written.text() == "d\nb\n");
  output.reply(0, "a");
  CHECK(written.text() == "d\nb\na\n");
  output.reply(2, "c");
  CHECK(written.text() == "d\nb\na\nc\ne\n");
  output.reply(6, "g");
  output.reply(5, "f");
  CHECK(written.text() == "d\nb\na\nc\ne\nf\ng\n");
}

TEST_CASE("progress goes out at once") {
  const Written written;
  Output output(written.descriptor);
  output.reserve();
  output.reserve();
  output.reply(1, "b");
  output.aside("half");
  output.reply(0, "a");
  CHECK(written.text() == "half\na\nb\n");
}

}  // namespace
}  // namespace countsel
