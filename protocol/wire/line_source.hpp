// protocol/wire/line_source.hpp -- lines from a file descriptor, read as they are parsed.
//
// A line is never held as a whole: the parser takes its bytes straight from the read buffer, so a
// request of hundreds of megabytes costs no more memory than the columns made from it.
// Checked by: tests/protocol/wire/line_source_test.cpp.
#pragma once

#include <cstddef>
#include <cstdint>
#include <iterator>
#include <vector>

namespace countsel {

class LineSource {
 public:
  LineSource(int descriptor, std::size_t longest_line);

  /// Moves to the next line that is not empty; false at the end of input. A byte-order mark at the
  /// very start of the input is passed over.
  bool next_line();
  /// Passes over what is left of the current line.
  void skip_line();
  bool line_too_long() const { return too_long_; }

  /// At the end of the current line (or beyond its allowed length)?
  bool at_end() {
    if (position_ == filled_ && !refill()) return true;
    return buffer_[position_] == '\n' || length_ + (position_ - mark_) >= longest_ ? end_here() : false;
  }
  char current() const {
    // The parser would take a NUL for the end of its input; a control character it refuses.
    const char c = buffer_[position_];
    return c == '\0' ? '\x01' : c;
  }
  void advance() { ++position_; }

 private:
  bool refill();
  bool end_here();
  bool begin_line();

  int descriptor_;
  std::size_t longest_;
  std::vector<char> buffer_;
  std::size_t position_ = 0, filled_ = 0;
  std::size_t mark_ = 0;    // where counting of this line last started in the buffer
  std::size_t length_ = 0;  // bytes of this line before the mark
  bool ended_ = false, first_ = true, too_long_ = false, inside_ = false;
};

/// Input iterator over the current line, for the parser.
class LineIterator {
 public:
  using iterator_category = std::input_iterator_tag;
  using value_type = char;
  using difference_type = std::ptrdiff_t;
  using pointer = const char*;
  using reference = char;

  LineIterator() = default;
  explicit LineIterator(LineSource& source) : source_(&source) {}
  char operator*() const { return source_->current(); }
  LineIterator& operator++() {
    source_->advance();
    return *this;
  }
  void operator++(int) { source_->advance(); }
  bool operator==(const LineIterator& other) const {
    // One of the two is the end: a line is only ever walked once.
    return source_ ? source_->at_end() : other.source_ == nullptr || other.source_->at_end();
  }
  bool operator!=(const LineIterator& other) const { return !(*this == other); }

 private:
  LineSource* source_ = nullptr;
};

}  // namespace countsel
