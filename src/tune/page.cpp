#include "tune/page.hpp"

#include <algorithm>

#include "tauwright/core/error.hpp"

namespace tauwright {
inline namespace v0 {
namespace detail {

std::string shown(double x, int digits) { return is_finite(x) ? text_of(x, digits) : "unknown"; }

void Page::item(std::string label, const std::string& text) {
    label.resize(std::max(label_width, label.size() + 1), ' ');
    wrapped(label, text, label_width);
}

void Page::row(std::string label, std::string left, const std::string& right) {
    label.resize(std::max(label_width, label.size() + 1), ' ');
    left.resize(std::max<std::size_t>(24, left.size() + 1), ' ');
    line(label + left + right);
}

void Page::line(std::string_view text) {
    while (!text.empty() && text.back() == ' ') text.remove_suffix(1);
    out_.append(text).push_back('\n');
}

void Page::wrapped(const std::string& first, const std::string& text, std::size_t indent) {
    std::string current = first;
    std::size_t begin = 0;
    bool empty = true;
    while (begin < text.size()) {
        const std::size_t end = std::min(text.find(' ', begin), text.size());
        const std::string word = text.substr(begin, end - begin);
        if (!empty && current.size() + 1 + word.size() > page_width) {
            line(current);
            current.assign(indent, ' ');
            empty = true;
        }
        if (!empty) current += ' ';
        current += word;
        empty = false;
        begin = end + 1;
    }
    line(current);
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
