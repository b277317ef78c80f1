// tests/protocol/wire/request_reader_test.cpp -- where each part of a line goes.
#include "protocol/wire/request_reader.hpp"

#include <doctest/doctest.h>

#include <cmath>

namespace countsel {
namespace {

Code trouble(const std::string& line) {
  const Request request = read_request(line);
  REQUIRE(request.trouble);
  return request.trouble->code;
}
Code type_trouble(const std::string& line) {
  const Request request = read_request(line);
  REQUIRE(!request.trouble);
  REQUIRE(request.type_trouble);
  return request.type_trouble->code;
}

TEST_CASE("the parts of a request") {
  const Request request = read_request(
      R"({"id":7,"ask":"how_often","of":{"count":[1,2],"exposure":3,"roles":{"count":"count"},"header":false},)"
      R"("with":{"per":10,"prior":{"shape":1}},"words":{"events":"falls"},"want":["say"],"within_s":2,"progress":true})");
  REQUIRE(!request.trouble);
  CHECK(!request.type_trouble);
  CHECK(!request.unknown_key);
  CHECK(request.id == "7");
  CHECK(request.ask == "how_often");
  REQUIRE(request.of.direct.size() == 2);
  CHECK(request.of.direct[0].name == "count");
  CHECK(request.of.direct[0].numbers == std::vector<double>{1, 2});
  CHECK(request.of.direct[1].size() == 1);
  CHECK(request.of.rest.dump() == R"({"roles":{"count":"count"},"header":false})");
  CHECK(request.with.dump() == R"({"per":10,"prior":{"shape":1}})");
  CHECK(request.words.dump() == R"({"events":"falls"})");
  CHECK(request.want.dump() == R"(["say"])");
  CHECK(request.within_s == 2);
  CHECK(request.progress);
}

TEST_CASE("cells of every kind") {
  const Request request =
      read_request(R"({"of":{"columns":{"a":[1,-2.5,1e3,"x","",null,true,false,[],{"b":1}]}}})");
  REQUIRE(request.of.columns);
  const Column& column = request.of.columns->front();
  REQUIRE(column.size() == 10);
  CHECK(column.numbers[1] == -2.5);
  CHECK(column.numbers[2] == 1000);
  CHECK(column.texts == std::vector<std::string>{"x"});
  const std::vector<std::int32_t> tags = {tag::number, tag::number, tag::number, 0,           tag::blank,
                                          tag::blank,  tag::yes,    tag::no,     tag::nested, tag::nested};
  CHECK(column.tags == tags);
}

TEST_CASE("numbers beyond 2^53 stay beyond") {
  const Request request = read_request(
      R"({"of":{"a":[9007199254740992,9007199254740993,18446744073709551615,-1,9007199254740993.0]}})");
  const auto& numbers = request.of.direct[0].numbers;
  CHECK(numbers[0] == 9007199254740992.0);
  CHECK(numbers[1] > 9007199254740992.0);
  CHECK(numbers[2] == 18446744073709551616.0);
  CHECK(numbers[3] == -1);
  CHECK(numbers[4] > 9007199254740992.0);
}

TEST_CASE("a range is turned into columns") {
  const Request request = read_request(R"({"of":{"range":[["a","b"],[1,"x"],[2,null]]}})");
  REQUIRE(request.of.range);
  REQUIRE(request.of.range->size() == 2);
  CHECK(request.of.range->front().numbers == std::vector<double>{1, 2});
  CHECK(level_text(request.of.first_row, 1) == "b");
  CHECK(request.of.uneven_row == 0);
  const Request uneven = read_request(R"({"of":{"range":[["a","b"],[1,2],[3,4,5],[6]]}})");
  CHECK(uneven.of.uneven_row == 2);
  CHECK(uneven.of.uneven_cells == 3);
  CHECK(uneven.of.range->size() == 2);
  CHECK(read_request(R"({"of":{"range":[]}})").of.range->empty());
}

TEST_CASE("ids as they are written, and as they are compared") {
  const auto id = [](const std::string& written) {
    return read_request(R"({"id" : )" + written + R"( ,"ask":"held"})");
  };
  for (const char* written : {"7", "-7", "18446744073709551616", R"("a\u0041\/")", R"("")"})
    CHECK(id(written).id == written);
  CHECK(id(R"("\u0041\/")").id_plain == R"("A/")");
  CHECK(id("18446744073709551616").id_plain == "18446744073709551616");
  CHECK(id("null").id.empty());
  CHECK(id("1.5").type_trouble);
  CHECK(id("1.5").id == "1.5");
  CHECK(id("[1]").id.empty());
  CHECK(read_request(R"({"of":{"id":"\u0041"}})").of.id == R"("A")");
}

TEST_CASE("syntax") {
  CHECK(trouble("{") == Code::bad_json);
  CHECK(trouble("") == Code::bad_json);
  CHECK(trouble("5") == Code::not_an_object);
  CHECK(trouble("[]") == Code::not_an_object);
  CHECK(trouble(R"({"a":1,"a":1})") == Code::bad_json);
  CHECK(trouble("{\"a\":\"\xff\"}") == Code::bad_json);
  CHECK(trouble(R"({"of":{"a":[1e999]}})") == Code::bad_json);
}

TEST_CASE("nesting") {
  const auto lists = [](std::size_t count) {
    return R"({"of":{"a":)" + std::string(count, '[') + std::string(count, ']') + "}}";
  };
  CHECK(!read_request(lists(62)).trouble);
  CHECK(trouble(lists(63)) == Code::too_deep);
}

TEST_CASE("wrong types are found when the line has been read") {
  CHECK(type_trouble(R"({"of":5})") == Code::bad_type);
  CHECK(type_trouble(R"({"of":{"columns":5}})") == Code::bad_type);
  CHECK(type_trouble(R"({"of":{"range":[5]}})") == Code::bad_type);
  CHECK(type_trouble(R"({"within_s":0})") == Code::bad_value);
  CHECK(type_trouble(R"({"of":{"a":{"f64":"A"}}})") == Code::bad_value);
  CHECK(type_trouble(R"({"of":{"a":{"f65":"A"}}})") == Code::unknown_key);
  CHECK(read_request(R"({"ask":5,"of":5})").ask_trouble);
  CHECK(read_request(R"({"bsk":5,"csk":5})").unknown_key == "bsk");
}

TEST_CASE("a line that is too long keeps its id") {
  LineSource source(R"({"id":7,"ask":"held"})");
  CHECK(read_request(source).id == "7");
}

}  // namespace
}  // namespace countsel
