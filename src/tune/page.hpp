// Plain text pages of 78 columns.
#pragma once

#include <cstddef>
#include <string>
#include <string_view>
#include <utility>

namespace tauwright {
inline namespace v0 {
namespace detail {

constexpr std::size_t page_width = 78, label_width = 26;

/// To `digits` significant ones; "unknown" for what is no number.
std::string shown(double x, int digits = 5);

class Page {
public:
    void title(const std::string& text) { out_ += text + "\n" + std::string(page_width, '=') + "\n"; }
    void section(const std::string& text) { out_ += "\n" + text + "\n" + std::string(page_width, '-') + "\n"; }
    /// A label and a text, wrapped beside it.
    void item(std::string label, const std::string& text);
    void bullet(const std::string& mark, const std::string& text) { wrapped(mark + " ", text, mark.size() + 1); }
    /// Three columns: what, as found, proposed.
    void row(std::string label, std::string left, const std::string& right);
    void line(std::string_view text);
    std::string take() { return std::move(out_); }

private:
    void wrapped(const std::string& first, const std::string& text, std::size_t indent);
    std::string out_;
};

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
