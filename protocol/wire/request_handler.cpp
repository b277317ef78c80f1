// protocol/wire/request_handler.cpp -- where each value of a request goes.
#include "protocol/wire/request_handler.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <string_view>

#include "protocol/wire/brief.hpp"
#include "protocol/wire/large_counts.hpp"

namespace countsel {
namespace {

constexpr std::array<std::string_view, 8> outer_keys = {"id",    "ask",  "of",       "with",
                                                        "words", "want", "within_s", "progress"};
constexpr std::array<std::string_view, 9> small_keys = {"held",   "file", "roles", "only", "origin",
                                                        "header", "line", "id",    "model"};

template <std::size_t N>
bool one_of(const std::array<std::string_view, N>& names, std::string_view name) {
  return std::find(names.begin(), names.end(), name) != names.end();
}

constexpr const char* not_an_object_hint = R"(A request looks like {"ask":"hello"}.)";

// A value as the parser brings it: it can fill a cell, stand in a packed column, or become a tree's leaf.
// `plain` is its text in JSON, for ids.

struct Number {
  double value;
  const std::string& written;
  void put(ColumnBuilder& column) const { column.number(value); }
  void put(Packed& packed, bool in_list) const { packed.number(value, in_list); }
  Json json() const { return value; }
  std::string plain() const { return written; }
};

template <class T>
struct Whole {
  T value;
  double number;
  void put(ColumnBuilder& column) const { column.number(number); }
  void put(Packed& packed, bool in_list) const { packed.number(number, in_list); }
  Json json() const { return value; }
  std::string plain() const { return std::to_string(value); }
};

struct Text {
  std::string& value;
  void put(ColumnBuilder& column) const { column.text(value); }
  void put(Packed& packed, bool in_list) const { packed.text(value, in_list); }
  Json json() const { return value; }
  std::string plain() const { return Json(value).dump(); }
};

struct Other {
  std::int32_t tag;
  void put(ColumnBuilder& column) const { column.other(tag); }
  void put(Packed& packed, bool in_list) const { packed.other(tag, in_list); }
  Json json() const { return tag == tag::blank ? Json() : Json(tag == tag::yes); }
  std::string plain() const { return {}; }
};

}  // namespace

RequestHandler::RequestHandler(Request& request, LineSource& source) : request_(request), source_(source) {
  request_.of.rest = Json::object();
  at_.push_back(At::start);
}

bool RequestHandler::fail(Code code, std::string text, std::string hint) {
  if (!request_.trouble)
    request_.trouble.emplace(code, std::move(text), std::vector<Place>{}, std::move(hint));
  return false;
}

void RequestHandler::wrong(Code code, std::string text) {
  if (!request_.type_trouble) request_.type_trouble.emplace(code, std::move(text));
}

bool RequestHandler::enter(At at) {
  if (at_.size() > limits::deepest) {
    return fail(Code::too_deep, "The line nests deeper than " + std::to_string(limits::deepest) + " levels.",
                "Lists of cells need only a few.");
  }
  at_.push_back(at);
  return true;
}

template <class Value>
bool RequestHandler::scalar(const Value& value) {
  switch (at_.back()) {
    case At::cells:
      value.put(cells_);
      return true;
    case At::row:
      if (ColumnBuilder* cell = range_.next_cell()) value.put(*cell);
      return true;
    case At::packed:
    case At::packed_list:
      value.put(packed_, at_.back() == At::packed_list);
      return true;
    case At::columns:  // a bare value: a column of one row
      value.put(cells_);
      return finish_column();
    case At::of:
      if (!column_key()) {
        of_value(value.json(), key_ == "id" ? value.plain() : std::string());
        return true;
      }
      value.put(cells_);
      return finish_column();
    case At::outer:
      outer_value(value.json(), key_ == "id" ? value.plain() : std::string());
      return true;
    case At::tree:
      tree_.value(value.json());
      return small_enough();
    case At::rows:
      wrong(Code::bad_type, "of.range holds a single value where a row, a list of cells, belongs.");
      return true;
    case At::start:
      return fail(Code::not_an_object, "The line is a single value, not a JSON object.", not_an_object_hint);
    default:
      return true;
  }
}

bool RequestHandler::null() { return scalar(Other{tag::blank}); }
bool RequestHandler::boolean(bool value) { return scalar(Other{value ? tag::yes : tag::no}); }
bool RequestHandler::number_integer(std::int64_t value) {
  return scalar(Whole<std::int64_t>{value, static_cast<double>(value)});
}
bool RequestHandler::number_unsigned(std::uint64_t value) {
  return scalar(Whole<std::uint64_t>{value, beyond_largest_count(value)});
}
bool RequestHandler::number_float(double value, const std::string& written) {
  return scalar(Number{beyond_largest_count(value, written), written});
}
bool RequestHandler::string(std::string& value) { return scalar(Text{value}); }

bool RequestHandler::column_key() const {
  return !one_of(small_keys, key_) && key_ != "columns" && key_ != "range";
}

bool RequestHandler::small_enough() {
  if (!tree_.too_many()) return true;
  return fail(Code::too_large,
              "The options, words and rows to keep hold more than " + std::to_string(limits::most_values) +
                  " values.",
              "Only columns may be that long.");
}

bool RequestHandler::finish_column() {
  auto& into = at_.back() == At::columns ? *request_.of.columns : request_.of.direct;
  if (into.size() == limits::most_columns) {
    return fail(Code::too_large,
                "The table has more than " + std::to_string(limits::most_columns) + " columns.",
                "Send rows as rows: one list for each column.");
  }
  into.push_back(cells_.take(key_));
  cells_ = ColumnBuilder();
  return true;
}

void RequestHandler::of_value(const Json& value, std::string plain) {
  if (key_ == "columns") return wrong(Code::bad_type, "of.columns is an object of columns by name.");
  if (key_ == "range") return wrong(Code::bad_type, "of.range is a list of rows.");
  if (key_ == "id") request_.of.id = std::move(plain);
  request_.of.rest[key_] = value;
}

void RequestHandler::id_value(const Json& value, std::string plain) {
  // As it was written: between the colon and what the parser has read by now.
  std::string written = source_.recorded();
  written.erase(0, written.find_first_not_of(": \t\r"));
  if (value.is_number())
    written.resize(std::min(written.find_first_not_of("+-.0123456789eE"), written.size()));
  if (value.is_null()) return;
  const bool whole = value.is_number() && written.find_first_of(".eE") == std::string::npos;
  if (!value.is_string() && !whole) {
    wrong(Code::bad_type, "The id is " + brief_json(value) + "; an id is text or a whole number.");
    if (!value.is_number()) return;
  }
  request_.id = std::move(written);
  request_.id_plain = std::move(plain);
}

void RequestHandler::outer_value(const Json& value, std::string plain) {
  if (key_ == "id") return id_value(value, std::move(plain));
  if (value.is_null()) return;  // as good as absent
  const std::string is = key_ + " is " + brief_json(value) + "; it should be ";
  if (key_ == "ask") {
    if (value.is_string()) {
      request_.ask = value.get<std::string>();
    } else {
      request_.ask_trouble.emplace(Code::bad_type, is + "the name of a question, a text.");
    }
  } else if (key_ == "within_s") {
    if (!value.is_number()) {
      wrong(Code::bad_type, is + "a number of seconds above 0.");
    } else if (const double seconds = value.get<double>(); seconds > 0) {
      request_.within_s = seconds;
    } else {
      wrong(Code::bad_value, is + "above 0.");
    }
  } else if (key_ == "progress") {
    if (!value.is_boolean()) return wrong(Code::bad_type, is + "true or false.");
    request_.progress = value.get<bool>();
  } else if (key_ == "of" || key_ == "with" || key_ == "words") {
    wrong(Code::bad_type, is + "an object.");
  } else if (key_ == "want") {
    wrong(Code::bad_type, is + "a list of the parts of the answer that are wanted.");
  }
}

bool RequestHandler::open_small(Json container) {
  Json& root = at_.back() == At::of ? request_.of.rest[key_]
               : key_ == "with"     ? request_.with
               : key_ == "words"    ? request_.words
                                    : request_.want;
  tree_.begin(root);
  if (!enter(At::tree)) return false;
  tree_.open(std::move(container));
  return true;
}

bool RequestHandler::start_object(std::size_t) {
  keys_.open();
  switch (at_.back()) {
    case At::start:
      return enter(At::outer);
    case At::outer:
      if (key_ == "of") {
        request_.of.given = true;
        return enter(At::of);
      }
      if (key_ == "with" || key_ == "words") return open_small(Json::object());
      outer_value(Json::object(), {});
      return enter(At::astray);
    case At::of:
      if (key_ == "columns") {
        request_.of.columns.emplace();
        return enter(At::columns);
      }
      if (one_of(small_keys, key_)) return open_small(Json::object());
      if (key_ == "range") {
        of_value(Json::object(), {});
        return enter(At::astray);
      }
      [[fallthrough]];
    case At::columns:
      packed_ = Packed();
      return enter(At::packed);
    case At::tree:
      if (!enter(At::tree)) return false;
      tree_.open(Json::object());
      return small_enough();
    default:
      return stray();
  }
}

bool RequestHandler::start_array(std::size_t) {
  switch (at_.back()) {
    case At::start:
      return fail(Code::not_an_object, "The line is a list, not a JSON object.", not_an_object_hint);
    case At::outer:
      if (key_ == "want") return open_small(Json::array());
      outer_value(Json::array(), {});
      return enter(At::astray);
    case At::of:
      if (key_ == "range") return enter(At::rows);
      if (one_of(small_keys, key_)) return open_small(Json::array());
      if (key_ == "columns") {
        of_value(Json::array(), {});
        return enter(At::astray);
      }
      return enter(At::cells);
    case At::columns:
      return enter(At::cells);
    case At::rows:
      range_.begin_row();
      return enter(At::row);
    case At::packed:
      return packed_.list() ? enter(At::packed_list) : enter(At::astray);
    case At::tree:
      if (!enter(At::tree)) return false;
      tree_.open(Json::array());
      return small_enough();
    default:
      return stray();
  }
}

bool RequestHandler::stray() {
  if (at_.back() == At::cells || at_.back() == At::row) scalar(Other{tag::nested});
  if (at_.back() == At::packed || at_.back() == At::packed_list) packed_.nested();
  if (at_.back() == At::rows)
    wrong(Code::bad_type, "of.range holds an object where a row, a list of cells, belongs.");
  return enter(At::astray);
}

bool RequestHandler::key(std::string& name) {
  switch (keys_.key(name)) {
    case KeyGuard::Verdict::twice:
      return fail(Code::bad_json, "The key \"" + brief(name) + "\" stands twice in one object.",
                  "Each key of an object may stand there once.");
    case KeyGuard::Verdict::too_many:
      return fail(Code::too_large, "The line has more than " + std::to_string(limits::most_keys) + " keys.",
                  "Send rows as rows: one list for each column.");
    default:
      break;
  }
  switch (at_.back()) {
    case At::outer:
      if (!one_of(outer_keys, name) && !request_.unknown_key) request_.unknown_key = name;
      if (name == "id") source_.record();
      key_ = name;
      return true;
    case At::of:
    case At::columns:
      key_ = name;
      return true;
    case At::packed:
      packed_.key(name);
      return true;
    case At::tree:
      tree_.key(std::move(name));
      return true;
    default:
      return true;
  }
}

bool RequestHandler::end_object() {
  const At left = at_.back();
  at_.pop_back();
  keys_.close();
  if (left == At::tree) tree_.close();
  if (left == At::outer) at_.back() = At::done;
  if (left != At::packed) return true;
  auto trouble = packed_.finish(key_, cells_);
  if (trouble && !request_.type_trouble) request_.type_trouble = std::move(trouble);
  return finish_column();
}

bool RequestHandler::end_array() {
  const At left = at_.back();
  at_.pop_back();
  switch (left) {
    case At::tree:
      tree_.close();
      return true;
    case At::cells:
      return finish_column();
    case At::row:
      if (range_.end_row()) return true;
      return fail(Code::too_large,
                  "The range has more than " + std::to_string(limits::most_columns) + " columns.",
                  "A range is a list of rows.");
    case At::rows:
      range_.finish(request_.of);
      return true;
    default:
      return true;
  }
}

bool RequestHandler::parse_error(std::size_t position, const std::string&,
                                 const nlohmann::detail::exception& error) {
  const std::string_view what = error.what();
  const char* reason = what.find("UTF-8") != std::string_view::npos      ? ", which is not valid UTF-8."
                       : what.find("overflow") != std::string_view::npos ? ", a number too large to be read."
                                                                         : ".";
  return fail(Code::bad_json,
              "The line is not valid JSON: trouble at byte " + std::to_string(position) + reason,
              "A request is one JSON object on one line, in UTF-8.");
}

}  // namespace countsel
