// engine/table/text_index.hpp -- which of the texts met so far is this one?
//
// Open addressing over indices into the list of texts: a text is stored once, and a column of a million
// different texts costs four to eight bytes for each beside the texts themselves.
// Checked by: tests/engine/table/text_index_test.cpp.
#pragma once

#include <cstdint>
#include <string>
#include <string_view>
#include <vector>

namespace countsel {

class TextIndex {
 public:
  /// Index of `text` in `texts`, to whose end it is added if it is new. `texts` is always the same list.
  std::int32_t find_or_add(std::string_view text, std::vector<std::string>& texts);

 private:
  void grow(const std::vector<std::string>& texts);

  std::vector<std::int32_t> slots_;  // -1: free; the size is a power of two
  std::int32_t last_ = -1;           // levels come in runs
};

}  // namespace countsel
