// protocol/wire/line_source.cpp -- filling the buffer, counting a line's bytes.
#include "protocol/wire/line_source.hpp"

#include <unistd.h>

#include <algorithm>
#include <cerrno>

namespace countsel {

LineSource::LineSource(int descriptor, std::size_t longest_line)
    : descriptor_(descriptor), longest_(longest_line), buffer_(std::size_t{1} << 18) {}

bool LineSource::refill() {
  if (ended_) return false;
  length_ += position_ - mark_;
  mark_ = position_ = filled_ = 0;
  for (;;) {
    const auto got = ::read(descriptor_, buffer_.data(), buffer_.size());
    if (got > 0) {
      filled_ = static_cast<std::size_t>(got);
      return true;
    }
    if (got < 0 && errno == EINTR) continue;
    ended_ = true;
    return false;
  }
}

bool LineSource::end_here() {
  if (buffer_[position_] != '\n') too_long_ = true;
  return true;
}

void LineSource::skip_line() {
  if (!inside_) return;
  for (;;) {
    if (position_ == filled_ && !refill()) break;
    const char c = buffer_[position_++];
    if (c == '\n') break;
  }
  inside_ = false;
}

bool LineSource::begin_line() {
  mark_ = position_;
  length_ = 0;
  too_long_ = false;
  inside_ = true;
  if (!first_) return true;
  first_ = false;
  // Part of a mark is put back, for the parser to refuse.
  static constexpr char byte_order_mark[] = "\xEF\xBB\xBF";
  for (int i = 0; i < 3; ++i) {
    if (position_ == filled_ && !refill()) return false;
    if (buffer_[position_] != byte_order_mark[i]) {
      position_ -= std::min(position_, static_cast<std::size_t>(i));
      break;
    }
    ++position_;
  }
  mark_ = position_;
  return true;
}

bool LineSource::next_line() {
  skip_line();
  for (;;) {
    if (position_ == filled_ && !refill()) return false;
    if (!begin_line()) return false;
    while (!at_end() && (current() == ' ' || current() == '\t' || current() == '\r')) advance();
    if (!at_end() || too_long_) return true;
    if (position_ == filled_) return false;
    skip_line();
  }
}

}  // namespace countsel
