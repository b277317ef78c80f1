// tests/engine/table/text_index_test.cpp -- texts keep the numbers of their first appearance.
#include "engine/table/text_index.hpp"

#include <doctest/doctest.h>

#include <unordered_map>

namespace countsel {
namespace {

TEST_CASE("a text met again has its first number") {
  TextIndex index;
  std::vector<std::string> texts;
  CHECK(index.find_or_add("iron", texts) == 0);
  CHECK(index.find_or_add("pvc", texts) == 1);
  CHECK(index.find_or_add("iron", texts) == 0);
  CHECK(index.find_or_add("", texts) == 2);
  CHECK(index.find_or_add("", texts) == 2);
  CHECK(texts == std::vector<std::string>{"iron", "pvc", ""});
}

TEST_CASE("many texts, in step with a map") {
  TextIndex index;
  std::vector<std::string> texts;
  std::unordered_map<std::string, std::int32_t> map;
  for (std::uint32_t i = 0; i < 100'000; ++i) {
    const std::string text = std::to_string(i * 2654435761U % 20'011);
    const auto wanted = map.try_emplace(text, static_cast<std::int32_t>(map.size())).first->second;
    REQUIRE(index.find_or_add(text, texts) == wanted);
  }
  CHECK(texts.size() == map.size());
}

TEST_CASE("bytes of any kind, and lengths of any kind") {
  TextIndex index;
  std::vector<std::string> texts;
  for (std::size_t length = 0; length < 600; ++length) {
    CHECK(index.find_or_add(std::string(length, '\0'), texts) == static_cast<std::int32_t>(length));
  }
  CHECK(index.find_or_add(std::string(3, '\0'), texts) == 3);
}

}  // namespace
}  // namespace countsel
