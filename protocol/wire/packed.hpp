// protocol/wire/packed.hpp -- a column packed by a program: {"f64": …} or {"levels": …, "codes": …}.
#pragma once

#include <set>
#include <string>
#include <vector>

#include "engine/table/column.hpp"

namespace countsel {

class Packed {
 public:
  bool key(const std::string& name) { return keys_.insert(name).second; }
  void text(const std::string& key, const std::string& value);
  void number(const std::string& key, double value);
  void other() { astray_ = true; }
  bool list(const std::string& key);
  /// Fills `into`; returns what is wrong, as the end of a sentence that begins with the column's name.
  std::string finish(ColumnBuilder& into);

 private:
  std::set<std::string> keys_;
  bool astray_ = false, bad_base64_ = false, infinite_ = false;
  std::vector<double> doubles_;
  std::vector<std::string> levels_;
  std::vector<std::int32_t> codes_;
  double worst_code_ = -1;
};

}  // namespace countsel
