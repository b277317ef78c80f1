// tests/protocol/wire/json_writer_test.cpp -- numbers that read back, texts that any parser takes.
#include "protocol/wire/json_writer.hpp"

#include <doctest/doctest.h>

#include <bit>
#include <cmath>
#include <limits>
#include <nlohmann/json.hpp>
#include <random>

namespace countsel {
namespace {

std::string number(double value) {
  std::string out;
  JsonWriter(out).number(value);
  return out;
}

TEST_CASE("numbers as people would write them where that loses nothing") {
  CHECK(number(0) == "0");
  CHECK(number(-0.0) == "0");
  CHECK(number(7) == "7");
  CHECK(number(-1200) == "-1200");
  CHECK(number(0.1) == "0.1");
  CHECK(number(9007199254740991.0) == "9007199254740991");
  CHECK(number(1e22) == "1e+22");
  CHECK(number(5e-324) == "5e-324");
}

TEST_CASE("what is no number on the wire") {
  CHECK(number(std::nan("")) == "null");
  CHECK(number(std::numeric_limits<double>::infinity()) == "\"inf\"");
  CHECK(number(-std::numeric_limits<double>::infinity()) == "\"-inf\"");
}

TEST_CASE("every double reads back as the same double") {
  std::mt19937_64 random(7);
  for (int i = 0; i < 100'000; ++i) {
    const double value = std::bit_cast<double>(random());
    if (!std::isfinite(value) || value == 0) continue;
    const double back = nlohmann::json::parse(number(value)).get<double>();
    REQUIRE(std::bit_cast<std::uint64_t>(back) == std::bit_cast<std::uint64_t>(value));
  }
}

TEST_CASE("texts are escaped where RFC 8259 asks for it and nowhere else") {
  std::string out;
  JsonWriter(out).text(std::string("a\"b\\c\n\r\t\b\x01\x1f/\x7f\xC3\xA9", 15));
  CHECK(out == "\"a\\\"b\\\\c\\n\\r\\t\\u0008\\u0001\\u001f/\x7f\xC3\xA9\"");
  std::string all;
  for (int c = 1; c < 128; ++c) all += static_cast<char>(c);
  std::string written;
  JsonWriter(written).text(all);
  CHECK(nlohmann::json::parse(written).get<std::string>() == all);
}

TEST_CASE("commas stand between and nowhere else") {
  std::string out;
  JsonWriter json(out);
  json.open('{').key("a").open('[').close(']').key("b").open('{').close('}');
  json.key("c").open('[').number(1).text("x").boolean(true).raw("null").open('[').close(']').close(']').close(
      '}');
  CHECK(out == R"({"a":[],"b":{},"c":[1,"x",true,null,[]]})");
  std::string lists;
  JsonWriter(lists).numbers({1, 2.5}).texts({"a", "b"});
  CHECK(lists == R"([1,2.5],["a","b"])");
}

}  // namespace
}  // namespace countsel
