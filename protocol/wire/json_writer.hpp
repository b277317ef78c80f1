// protocol/wire/json_writer.hpp -- JSON out, appended to one string.
//
// Checked by: tests/protocol/wire/json_writer_test.cpp.
#pragma once

#include <string>
#include <string_view>
#include <vector>

namespace countsel {

class JsonWriter {
 public:
  explicit JsonWriter(std::string& out) : out_(out) {}

  JsonWriter& open(char bracket) {
    separate();
    out_ += bracket;
    fresh_ = true;
    return *this;
  }
  JsonWriter& close(char bracket) {
    out_ += bracket;
    fresh_ = false;
    return *this;
  }
  JsonWriter& key(std::string_view name) {
    text(name);
    out_ += ':';
    fresh_ = true;
    return *this;
  }
  /// The shortest text that reads back as the same double; NaN is null, an infinity "inf" or "-inf".
  JsonWriter& number(double value);
  JsonWriter& text(std::string_view text);
  JsonWriter& raw(std::string_view json) {
    separate();
    out_ += json;
    return *this;
  }
  JsonWriter& boolean(bool value) { return raw(value ? "true" : "false"); }
  JsonWriter& numbers(const std::vector<double>& values);
  JsonWriter& texts(const std::vector<std::string>& values);

 private:
  void separate() {
    if (!fresh_) out_ += ',';
    fresh_ = false;
  }

  std::string& out_;
  bool fresh_ = true;
};

}  // namespace countsel
