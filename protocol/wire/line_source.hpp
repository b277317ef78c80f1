// protocol/wire/line_source.hpp -- lines from a file descriptor, read as they are parsed.
//
// A line is never held as a whole: the parser takes its bytes straight from the read buffer, so a
// request of hundreds of megabytes costs no more memory than the columns made from it.
// Checked by: tests/protocol/wire/line_source_test.cpp.
#pragma once

#include <cstddef>
#include <iterator>
#include <string>
#include <string_view>
#include <vector>

namespace countsel {

class LineSource {
 public:
  LineSource(int descriptor, std::size_t longest_line);
  /// One line that is at hand already.
  explicit LineSource(std::string_view line);

  /// Moves to the next line that is not empty; false at the end of input. A byte-order mark at the
  /// very start of the input is passed over.
  bool next_line();
  /// Passes over what is left of the current line.
  void skip_line();
  /// Was the line longer than allowed? Known once its allowed bytes have been read.
  bool line_too_long() const { return too_long_; }

  /// At the end of the current line (or of its allowed length)?
  bool at_end() {
    if (position_ != stop_) [[likely]]
      return false;
    return !more_of_line();
  }
  /// A NUL is given as another control character, which the parser refuses; it would end at a NUL.
  char current() const { return *position_; }
  void advance() { ++position_; }

  /// Starts to remember what is read; `recorded` is what was read since, and stops it.
  void record();
  std::string recorded();

 private:
  std::size_t read_behind(std::size_t filled);
  bool refill();
  void begin_line();
  void pass_byte_order_mark();
  void set_stop();
  [[gnu::cold]] bool more_of_line();

  int descriptor_;
  std::size_t longest_;
  std::vector<char> buffer_;
  const char* position_;
  const char* filled_;      // end of what was read
  const char* stop_;        // up to where the buffer surely holds bytes of this line
  const char* mark_;        // where counting of this line last started in the buffer
  std::size_t length_ = 0;  // bytes of this line before the mark
  const char* record_from_ = nullptr;
  std::string record_;
  bool recording_ = false;
  bool ended_ = false, first_ = true, too_long_ = false, inside_ = false;
};

/// Input iterator over the current line, for the parser; a default one is the end.
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
  /// Only asked of a walking iterator, against the end.
  bool operator!=(const LineIterator&) const { return !source_->at_end(); }
  bool operator==(const LineIterator&) const { return source_->at_end(); }

 private:
  LineSource* source_ = nullptr;
};

}  // namespace countsel
