// protocol/wire/request_handler.hpp -- what the SAX parser calls while it reads a request.
//
// It knows at every moment what the parser is inside of, and puts each value where it belongs: cells
// into columns, small parts into trees. What stands where nothing belongs is passed over and noted.
// Checked by: tests/protocol/wire/request_reader_test.cpp.
#pragma once

#include <nlohmann/json.hpp>
#include <string>
#include <vector>

#include "protocol/wire/key_guard.hpp"
#include "protocol/wire/line_source.hpp"
#include "protocol/wire/packed.hpp"
#include "protocol/wire/range_builder.hpp"
#include "protocol/wire/request.hpp"
#include "protocol/wire/tree_builder.hpp"

namespace countsel {

class RequestHandler {
 public:
  RequestHandler(Request& request, LineSource& source);

  // The events; each returns false to end the reading, with `request.trouble` saying why.
  bool null();
  bool boolean(bool value);
  bool number_integer(std::int64_t value);
  bool number_unsigned(std::uint64_t value);
  bool number_float(double value, const std::string& written);
  bool string(std::string& value);
  bool binary(std::vector<std::uint8_t>&) { return false; }
  bool start_object(std::size_t);
  bool key(std::string& name);
  bool end_object();
  bool start_array(std::size_t);
  bool end_array();
  bool parse_error(std::size_t position, const std::string&, const nlohmann::detail::exception& error);

 private:
  /// What the parser is inside of.
  enum class At {
    start,        // before the outer object
    outer,        // the outer object
    of,           // `of`
    columns,      // `of.columns`
    cells,        // a list of cells of one column
    packed,       // an object that packs one column
    packed_list,  // a list in it
    rows,         // `of.range`
    row,          // one row of it
    tree,         // a small part, built as a tree
    astray,       // a list or object where none belongs
    done
  };

  bool fail(Code code, std::string text, std::string hint = {});
  void wrong(Code code, std::string text);
  bool enter(At at);
  bool stray();
  /// Puts one value where it belongs.
  template <class Value>
  bool scalar(const Value& value);
  bool column_key() const;  ///< does the key in `of` name a column?
  bool small_enough();
  bool finish_column();
  bool open_small(Json container);
  void of_value(const Json& value, std::string plain);
  void outer_value(const Json& value, std::string plain);
  void id_value(const Json& value, std::string plain);

  Request& request_;
  LineSource& source_;
  std::vector<At> at_;
  std::string key_;  // in the outer object, of or columns
  KeyGuard keys_;
  ColumnBuilder cells_;
  RangeBuilder range_;
  Packed packed_;
  TreeBuilder tree_;
};

}  // namespace countsel
