#include "shell.hpp"

#include <cstring>

#include "structs.hpp"

namespace tauwright::shell {

bool usable(const tauw_error* error) noexcept {
    return error == nullptr || is_known_size<tauw_error>(error->struct_size);
}

std::string_view cut(std::string_view text, std::size_t room) noexcept {
    if (text.size() <= room) return text;
    std::size_t end = room;
    // A byte 10xxxxxx continues a character that began before it.
    while (end > 0 && (static_cast<unsigned char>(text[end]) & 0xc0u) == 0x80u) --end;
    return text.substr(0, end);
}

std::int32_t report(tauw_error* error, error_code code, std::string_view message) noexcept {
    if (error != nullptr) {
        error->code = static_cast<std::int32_t>(code);
        const std::string_view shown = cut(message, sizeof error->message - 1);
        if (!shown.empty()) std::memcpy(error->message, shown.data(), shown.size());
        error->message[shown.size()] = '\0';
    }
    return static_cast<std::int32_t>(code);
}

}  // namespace tauwright::shell
