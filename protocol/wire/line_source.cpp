// protocol/wire/line_source.cpp -- filling the buffer, finding a line's end, counting its bytes.
#include "protocol/wire/line_source.hpp"

#include <poll.h>
#include <unistd.h>

#include <algorithm>
#include <cerrno>
#include <cstring>
#include <limits>

namespace countsel {
namespace {

constexpr std::size_t buffer_size = std::size_t{1} << 18;

/// Bytes read, 0 at the end of input or on trouble; waits where the descriptor would not.
std::size_t read_some(int descriptor, char* into, std::size_t room) {
  for (;;) {
    const auto got = ::read(descriptor, into, room);
    if (got >= 0) return static_cast<std::size_t>(got);
    if (errno == EINTR) continue;
    if (errno != EAGAIN) return 0;
    pollfd waiting{descriptor, POLLIN, 0};
    ::poll(&waiting, 1, -1);
  }
}

}  // namespace

LineSource::LineSource(int descriptor, std::size_t longest_line)
    : descriptor_(descriptor), longest_(longest_line), buffer_(buffer_size) {
  position_ = filled_ = stop_ = mark_ = buffer_.data();
}

LineSource::LineSource(std::string_view line)
    : descriptor_(-1),
      longest_(std::numeric_limits<std::size_t>::max()),
      buffer_(line.begin(), line.end()),
      ended_(true) {
  buffer_.push_back('\n');
  std::replace(buffer_.begin(), buffer_.end(), '\0', '\x01');
  position_ = buffer_.data();
  filled_ = position_ + line.size();
  begin_line();
}

std::size_t LineSource::read_behind(std::size_t filled) {
  char* into = buffer_.data() + filled;
  const auto got = read_some(descriptor_, into, buffer_.size() - filled);
  ended_ = got == 0;
  if (std::memchr(into, '\0', got)) std::replace(into, into + got, '\0', '\x01');
  return filled + got;
}

bool LineSource::refill() {
  if (recording_) record_.append(record_from_, filled_);
  length_ += static_cast<std::size_t>(filled_ - mark_);
  record_from_ = mark_ = position_ = filled_ = stop_ = buffer_.data();
  if (!ended_) filled_ += read_behind(0);
  return position_ != filled_;
}

void LineSource::set_stop() {
  const auto bytes = static_cast<std::size_t>(filled_ - position_);
  const auto* newline = static_cast<const char*>(std::memchr(position_, '\n', bytes));
  stop_ = newline ? newline : filled_;
  const std::size_t before = length_ + static_cast<std::size_t>(position_ - mark_);
  const std::size_t allowed = longest_ - std::min(longest_, before);
  if (static_cast<std::size_t>(stop_ - position_) > allowed) stop_ = position_ + allowed;
}

bool LineSource::more_of_line() {
  while (position_ == filled_) {
    if (!refill()) return false;
    set_stop();
    if (position_ != stop_) return true;
  }
  too_long_ = too_long_ || *position_ != '\n';
  return false;
}

void LineSource::skip_line() {
  // What is passed over is not wanted, nor the room that what was recorded took.
  recording_ = false;
  record_ = std::string();
  while (inside_) {
    const auto bytes = static_cast<std::size_t>(filled_ - position_);
    const auto* newline = static_cast<const char*>(std::memchr(position_, '\n', bytes));
    if (newline) position_ = newline + 1;
    inside_ = !newline && refill();
  }
}

void LineSource::begin_line() {
  mark_ = position_;
  length_ = 0;
  too_long_ = recording_ = false;
  inside_ = true;
  set_stop();
}

void LineSource::pass_byte_order_mark() {
  constexpr std::string_view mark = "\xEF\xBB\xBF";
  const auto bytes = [&] { return static_cast<std::size_t>(filled_ - buffer_.data()); };
  const auto begins = [&](std::size_t size) {
    return std::string_view(buffer_.data(), size) == mark.substr(0, size);
  };
  // Wait for the rest only of what may be a mark: any other line must be answered at once.
  while (!ended_ && bytes() < mark.size() && begins(bytes())) {
    filled_ = buffer_.data() + read_behind(bytes());
  }
  if (bytes() >= mark.size() && begins(mark.size())) position_ += mark.size();
}

bool LineSource::next_line() {
  skip_line();
  for (;;) {
    if (position_ == filled_ && !refill()) return false;
    if (first_) {
      first_ = false;
      pass_byte_order_mark();
      if (position_ == filled_) continue;
    }
    begin_line();
    while (!at_end() && (current() == ' ' || current() == '\t' || current() == '\r')) advance();
    if (!at_end() || too_long_) return true;
    skip_line();
  }
}

void LineSource::record() {
  recording_ = true;
  record_.clear();
  record_from_ = position_;
}

std::string LineSource::recorded() {
  if (!recording_) return {};
  recording_ = false;
  record_.append(record_from_, position_);
  return std::move(record_);
}

}  // namespace countsel
