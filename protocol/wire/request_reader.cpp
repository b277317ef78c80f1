// protocol/wire/request_reader.cpp -- the SAX handler behind read_request.
#include "protocol/wire/request_reader.hpp"

#include <algorithm>
#include <cmath>
#include <set>

#include "protocol/wire/base64.hpp"
#include "protocol/wire/packed.hpp"
#include "protocol/wire/tree_builder.hpp"

namespace countsel {
namespace {

constexpr std::size_t deepest = 64;

/// Where in a line the parser is.
enum class At {
  start,    // before the outer object
  outer,    // in the outer object
  of,       // in `of`
  columns,  // in `of.columns`
  cells,    // in a list of cells of one column
  packed,   // in an object that packs one column
  rows,     // in `of.range`
  row,      // in one row of it
  tree,     // in a small part, built as a tree
  astray,   // in a list or object where a cell belongs
  done
};

bool small_key(std::string_view key) {
  for (const auto* name : {"held", "file", "roles", "only", "origin", "header", "line", "id", "model"}) {
    if (key == name) return true;
  }
  return false;
}

class Handler {
 public:
  explicit Handler(Request& request) : request_(request) { at_.push_back(At::start); }

  // What the parser calls.
  bool null() { return scalar(nullptr); }
  bool boolean(bool value) { return scalar(value); }
  bool number_integer(std::int64_t value) { return integer(value, static_cast<double>(value)); }
  bool number_unsigned(std::uint64_t value) {
    // Beyond 2^53 a double may round back into the allowed range of counts; it must stay beyond.
    double number = static_cast<double>(value);
    if (value > (std::uint64_t{1} << 53) && number <= 9007199254740992.0) number = 9007199254740994.0;
    return integer(value, number);
  }
  bool number_float(double value, const std::string& written) {
    if (!std::isfinite(value))
      return fail(Code::bad_json, "The number " + written + " is too large to be read.");
    if (in_data()) return cell_number(value);
    if (at_.back() == At::packed) return packed_number(value);
    if (at_.back() == At::outer && key_ == "id") return id(written);
    if (at_.back() == At::of && key_ == "id") request_.of.id = written;
    return scalar(Json(value));
  }
  bool string(std::string& value);
  bool binary(std::vector<std::uint8_t>&) { return false; }
  bool start_object(std::size_t);
  bool key(std::string& name);
  bool end_object();
  bool start_array(std::size_t);
  bool end_array();
  bool parse_error(std::size_t position, const std::string&, const nlohmann::detail::exception& error);

 private:
  bool fail(Code code, std::string text, std::string hint = {}) {
    if (!request_.trouble)
      request_.trouble.emplace(code, std::move(text), std::vector<Place>{}, std::move(hint));
    return false;
  }
  void wrong_type(std::string text, std::string column = {}) {
    if (request_.type_trouble) return;
    request_.type_trouble.emplace(Code::bad_type, std::move(text),
                                  column.empty() ? std::vector<Place>{} : std::vector<Place>{{column, 0}});
  }
  bool in_data() const {
    const At at = at_.back();
    return at == At::cells || at == At::row || at == At::astray || at == At::columns ||
           (at == At::of && !small_key(key_) && key_ != "columns" && key_ != "range");
  }
  bool enter(At at) {
    if (at_.size() > deepest) {
      return fail(Code::too_deep, "The line nests deeper than 64 levels.", "Lists of cells need only three.");
    }
    at_.push_back(at);
    return true;
  }
  template <class Whole>
  bool integer(Whole value, double number) {
    if (in_data()) return cell_number(number);
    if (at_.back() == At::packed) return packed_number(number);
    if (at_.back() == At::outer && key_ == "id") return id(std::to_string(value));
    if (at_.back() == At::of && key_ == "id") request_.of.id = std::to_string(value);
    return scalar(Json(value));
  }
  bool id(std::string written) {
    if (written.find_first_of(".eE") != std::string::npos) {
      wrong_type("The id is " + written + "; an id is text or a whole number.");
    }
    request_.id = std::move(written);
    return true;
  }
  bool cell_number(double value) {
    switch (at_.back()) {
      case At::cells:
        cells_.number(value);
        return true;
      case At::row:
        row_cell().number(value);
        return true;
      case At::astray:
        return true;
      default:  // a bare number for a single row
        cells_.number(value);
        return finish_column();
    }
  }
  bool packed_number(double value) {
    packed_.number(key_, value);
    return true;
  }
  ColumnBuilder& row_cell();
  bool cell_text(std::string& value);
  bool cell_other(std::int32_t tag);
  bool scalar(Json value);
  bool finish_column();
  bool finish_row();
  bool finish_packed();
  void outer_value(Json value);

  Request& request_;
  std::vector<At> at_;
  std::string key_;
  std::set<std::string, std::less<>> outer_keys_, of_keys_, column_keys_;
  ColumnBuilder cells_;
  std::string column_name_;
  std::vector<ColumnBuilder> range_;
  std::size_t range_row_ = 0, range_cell_ = 0, first_cells_ = 0;
  Packed packed_;
  TreeBuilder tree_;
};

ColumnBuilder& Handler::row_cell() {
  // The first row stands apart until it is known whether it is a header.
  if (range_row_ == 0) {
    ++range_cell_;
    return cells_;
  }
  // A surplus cell is taken into a column that no row shares; the row is refused by its length later.
  if (range_cell_ >= range_.size()) range_.resize(range_cell_ + 1);
  return range_[range_cell_++];
}

bool Handler::cell_text(std::string& value) {
  switch (at_.back()) {
    case At::cells:
      cells_.text(value);
      return true;
    case At::row:
      row_cell().text(value);
      return true;
    case At::astray:
      return true;
    default:
      cells_.text(value);
      return finish_column();
  }
}

bool Handler::cell_other(std::int32_t tag) {
  switch (at_.back()) {
    case At::cells:
      cells_.other(tag);
      return true;
    case At::row:
      row_cell().other(tag);
      return true;
    case At::astray:
      return true;
    default:
      cells_.other(tag);
      return finish_column();
  }
}

bool Handler::finish_column() {
  auto& into = at_.back() == At::columns ? *request_.of.columns : request_.of.direct;
  into.push_back(cells_.take(key_));
  cells_ = ColumnBuilder();
  return true;
}

bool Handler::string(std::string& value) {
  switch (at_.back()) {
    case At::packed:
      packed_.text(key_, value);
      return true;
    case At::rows:
      wrong_type("of.range holds a text where a row, a list of cells, belongs.");
      return true;
    case At::outer:
      if (key_ == "id") {
        request_.id = Json(value).dump();
        return true;
      }
      return scalar(Json(std::move(value)));
    case At::tree:
      return tree_.value(Json(std::move(value)));
    default:
      if (in_data()) return cell_text(value);
      if (at_.back() == At::of && key_ == "id") request_.of.id = Json(value).dump();
      return scalar(Json(std::move(value)));
  }
}

bool Handler::scalar(Json value) {
  switch (at_.back()) {
    case At::start:
      return fail(Code::not_an_object, "The line is not a JSON object.",
                  R"(A request looks like {"ask":"hello"}.)");
    case At::tree:
      return tree_.value(std::move(value));
    case At::packed:
      packed_.other();
      return true;
    case At::rows:
      wrong_type("of.range holds a single value where a row, a list of cells, belongs.");
      return true;
    case At::outer:
      outer_value(std::move(value));
      return true;
    case At::of:
      if (small_key(key_)) {
        request_.of.rest[key_] = std::move(value);
        return true;
      }
      if (key_ == "columns" || key_ == "range") {
        wrong_type("of." + key_ + (key_ == "range" ? " is a list of rows." : " is an object of columns."));
        return true;
      }
      [[fallthrough]];
    default:
      return cell_other(value.is_null() ? tag::blank : value.get<bool>() ? tag::yes : tag::no);
  }
}

void Handler::outer_value(Json value) {
  if (key_ == "id") {
    if (!value.is_null()) return wrong_type("The id is text or a whole number.");
    return;
  }
  if (key_ == "ask") {
    if (!value.is_string()) return wrong_type("ask is the name of a question, a text.");
    request_.ask = value.get<std::string>();
  } else if (key_ == "within_s") {
    if (!value.is_number() || !(value.get<double>() > 0)) {
      return wrong_type("within_s is a number of seconds above 0.");
    }
    request_.within_s = value.get<double>();
  } else if (key_ == "progress") {
    if (!value.is_boolean()) return wrong_type("progress is true or false.");
    request_.progress = value.get<bool>();
  } else if (key_ == "of" || key_ == "with" || key_ == "words") {
    if (!value.is_null()) wrong_type(key_ + " is an object.");
  } else if (key_ == "want") {
    if (!value.is_null()) wrong_type("want is a list of the parts of the answer that are wanted.");
  }
}

bool Handler::start_object(std::size_t) {
  switch (at_.back()) {
    case At::start:
      return enter(At::outer);
    case At::outer:
      if (key_ == "of") {
        request_.of.given = true;
        return enter(At::of);
      }
      if (key_ == "with" || key_ == "words" || key_ == "want") {
        tree_.begin(key_ == "with" ? request_.with : key_ == "words" ? request_.words : request_.want);
        return enter(At::tree) && tree_.open(Json::object());
      }
      outer_value(Json::object());
      return enter(At::astray);
    case At::of:
      if (key_ == "columns") {
        request_.of.columns.emplace();
        return enter(At::columns);
      }
      if (small_key(key_)) {
        tree_.begin(request_.of.rest[key_]);
        return enter(At::tree) && tree_.open(Json::object());
      }
      if (key_ == "range") {
        wrong_type("of.range is a list of rows.");
        return enter(At::astray);
      }
      [[fallthrough]];
    case At::columns:
      column_name_ = key_;
      packed_ = Packed();
      return enter(At::packed);
    case At::tree:
      return enter(At::tree) && tree_.open(Json::object());
    case At::cells:
    case At::row:
      cell_other(tag::nested);
      return enter(At::astray);
    case At::rows:
      wrong_type("of.range holds an object where a row, a list of cells, belongs.");
      return enter(At::astray);
    case At::packed:
      packed_.other();
      return enter(At::astray);
    default:
      return enter(At::astray);
  }
}

bool Handler::start_array(std::size_t) {
  switch (at_.back()) {
    case At::start:
      return fail(Code::not_an_object, "The line is a list, not a JSON object.",
                  R"(A request looks like {"ask":"hello"}.)");
    case At::outer:
      if (key_ == "with" || key_ == "words" || key_ == "want") {
        if (key_ != "want") wrong_type(key_ + " is an object.");
        tree_.begin(key_ == "with" ? request_.with : key_ == "words" ? request_.words : request_.want);
        return enter(At::tree) && tree_.open(Json::array());
      }
      outer_value(Json::array());
      return enter(At::astray);
    case At::of:
      if (key_ == "range") {
        return enter(At::rows);
      }
      if (small_key(key_)) {
        tree_.begin(request_.of.rest[key_]);
        return enter(At::tree) && tree_.open(Json::array());
      }
      if (key_ == "columns") {
        wrong_type("of.columns is an object of columns by name.");
        return enter(At::astray);
      }
      return enter(At::cells);
    case At::columns:
      return enter(At::cells);
    case At::rows:
      range_cell_ = 0;
      return enter(At::row);
    case At::cells:
    case At::row:
      cell_other(tag::nested);
      return enter(At::astray);
    case At::packed:
      return packed_.list(key_) ? enter(At::packed) : enter(At::astray);
    case At::tree:
      return enter(At::tree) && tree_.open(Json::array());
    default:
      return enter(At::astray);
  }
}

bool Handler::key(std::string& name) {
  std::set<std::string, std::less<>>* seen = nullptr;
  switch (at_.back()) {
    case At::outer:
      seen = &outer_keys_;
      break;
    case At::of:
      seen = &of_keys_;
      break;
    case At::columns:
      seen = &column_keys_;
      break;
    case At::tree:
      if (!tree_.key(name))
        return fail(Code::bad_json, "The key \"" + name + "\" stands twice in one object.");
      return true;
    case At::packed:
      if (!packed_.key(name))
        return fail(Code::bad_json, "The key \"" + name + "\" stands twice in one object.");
      key_ = name;
      return true;
    default:
      return true;
  }
  if (!seen->insert(name).second) {
    return fail(Code::bad_json, "The key \"" + name + "\" stands twice in one object.");
  }
  key_ = name;
  if (at_.back() == At::outer) {
    static constexpr std::string_view known[] = {"id",    "ask",  "of",       "with",
                                                 "words", "want", "within_s", "progress"};
    if (std::find(std::begin(known), std::end(known), name) == std::end(known)) {
      request_.unknown_keys.push_back(name);
    }
  }
  return true;
}

bool Handler::finish_packed() {
  const bool inside = at_.back() == At::columns;
  key_ = column_name_;
  std::string trouble = packed_.finish(cells_);
  if (!trouble.empty()) wrong_type("Column " + column_name_ + " " + trouble, column_name_);
  auto& into = inside ? *request_.of.columns : request_.of.direct;
  into.push_back(cells_.take(column_name_));
  cells_ = ColumnBuilder();
  return true;
}

bool Handler::end_object() {
  const At left = at_.back();
  at_.pop_back();
  if (left == At::tree) return tree_.close();
  if (left == At::packed) return finish_packed();
  if (left == At::outer) at_.back() = At::done;
  return true;
}

bool Handler::finish_row() {
  if (range_row_ == 0) {
    first_cells_ = range_cell_;
    request_.of.first_row = cells_.take("");
    cells_ = ColumnBuilder();
    range_.resize(first_cells_);
  } else if (range_cell_ != first_cells_ && request_.of.uneven_row == 0) {
    request_.of.uneven_row = static_cast<std::int64_t>(range_row_);
    request_.of.uneven_cells = range_cell_;
  }
  ++range_row_;
  return true;
}

bool Handler::end_array() {
  const At left = at_.back();
  at_.pop_back();
  switch (left) {
    case At::tree:
      return tree_.close();
    case At::cells:
      return finish_column();
    case At::row:
      return finish_row();
    case At::rows:
      request_.of.range.emplace();
      for (auto& column : range_) request_.of.range->push_back(column.take(""));
      range_.clear();
      return true;
    default:
      return true;
  }
}

bool Handler::parse_error(std::size_t position, const std::string&,
                          const nlohmann::detail::exception& error) {
  const std::string what = error.what();
  const char* reason = what.find("UTF-8") != std::string::npos      ? ", which is not valid UTF-8."
                       : what.find("overflow") != std::string::npos ? ", a number too large to be read."
                                                                    : ".";
  return fail(Code::bad_json,
              "The line is not valid JSON: trouble at byte " + std::to_string(position) + reason,
              "A request is one JSON object on one line, in UTF-8.");
}

template <class Iterator>
Request parse(Iterator first, Iterator last) {
  Request request;
  request.of.rest = Json::object();
  Handler handler(request);
  Json::sax_parse(first, last, &handler);
  return request;
}

}  // namespace

Request read_request(LineSource& source) {
  // The parser would pass over a byte-order mark on any line; only the very first may have one.
  if (!source.at_end() && source.current() == '\xEF') {
    Request request;
    request.trouble.emplace(Code::bad_json, "The line does not begin with a JSON object.");
    return request;
  }
  Request request = parse(LineIterator(source), LineIterator());
  if (source.line_too_long()) {
    request.trouble.emplace(
        Code::too_large, "The line is longer than this server reads.", std::vector<Place>{},
        "Start it with a larger --max-line, hold the table in parts, or send packed columns.");
  }
  return request;
}

Request read_request(std::string_view line) { return parse(line.begin(), line.end()); }

}  // namespace countsel
