// tests/protocol/wire/brief_test.cpp -- quotations of what may be endless.
#include "protocol/wire/brief.hpp"

#include <doctest/doctest.h>

#include <nlohmann/json.hpp>

#include "protocol/data/utf8.hpp"

namespace countsel {
namespace {

TEST_CASE("short texts stay as they are") {
  CHECK(brief("") == "");
  CHECK(brief(std::string(60, 'x')) == std::string(60, 'x'));
  CHECK(brief_json(Json("a\"b")) == R"("a\"b")");
  CHECK(brief_json(Json::array({1, 2})) == "[1,2]");
}

TEST_CASE("long texts are cut between characters") {
  CHECK(brief(std::string(61, 'x')) == std::string(60, 'x') + "…");
  for (std::size_t before = 0; before < 8; ++before) {
    std::string text(before, 'x');
    for (int i = 0; i < 40; ++i) text += "😀";
    CHECK(valid_utf8(brief(text)));
    CHECK(brief(text).size() <= 63);
  }
}

TEST_CASE("a long value keeps its quotes") {
  const std::string text = brief_json(Json(std::string(1000, '"')));
  CHECK(text.front() == '"');
  CHECK(text.substr(text.size() - 4) == "…\"");
}

}  // namespace
}  // namespace countsel
