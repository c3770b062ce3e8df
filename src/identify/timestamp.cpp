#include "identify/timestamp.hpp"

#include <chrono>

namespace tauwright {
inline namespace v0 {
namespace detail {

namespace {

struct Reader {
    std::string_view rest;
    bool failed = false;

    int digits(std::size_t count) noexcept {
        int value = 0;
        for (std::size_t i = 0; i < count; ++i) {
            if (rest.empty() || rest.front() < '0' || rest.front() > '9') {
                failed = true;
                return 0;
            }
            value = 10 * value + (rest.front() - '0');
            rest.remove_prefix(1);
        }
        return value;
    }
    char take() noexcept {
        if (rest.empty()) {
            failed = true;
            return 0;
        }
        const char c = rest.front();
        rest.remove_prefix(1);
        return c;
    }
    void expect(char c) noexcept { failed |= take() != c; }
};

std::int64_t fraction_ns(Reader& in) noexcept {
    if (in.rest.empty() || in.rest.front() != '.') return 0;
    in.take();
    std::int64_t ns = 0, scale = 100'000'000;
    bool any = false;
    while (!in.rest.empty() && in.rest.front() >= '0' && in.rest.front() <= '9') {
        ns += (in.take() - '0') * scale;  // digits past the ninth add nothing
        scale /= 10;
        any = true;
    }
    in.failed |= !any;
    return ns;
}

}  // namespace

std::optional<Stamp> parse_timestamp(std::string_view text) noexcept {
    Reader in{text};
    const int year = in.digits(4);
    in.expect('-');
    const int month = in.digits(2);
    in.expect('-');
    const int day = in.digits(2);
    const char separator = in.take();
    in.failed |= separator != 'T' && separator != 't' && separator != ' ';
    const int hour = in.digits(2);
    in.expect(':');
    const int minute = in.digits(2);
    in.expect(':');
    const int second = in.digits(2);
    const std::int64_t ns = fraction_ns(in);
    if (in.failed || hour > 23 || minute > 59 || second > 60) return std::nullopt;
    using namespace std::chrono;
    const year_month_day date{std::chrono::year{year}, std::chrono::month{static_cast<unsigned>(month)},
                              std::chrono::day{static_cast<unsigned>(day)}};
    if (!date.ok()) return std::nullopt;

    Stamp stamp;
    std::int64_t seconds = std::int64_t{sys_days{date}.time_since_epoch().count()} * 86400 + hour * 3600 + minute * 60 + second;
    if (!in.rest.empty()) {
        const char sign = in.take();
        stamp.has_offset = true;
        if (sign == '+' || sign == '-') {
            const int hours = in.digits(2);
            in.expect(':');
            const int minutes = in.digits(2);
            if (in.failed || hours > 23 || minutes > 59) return std::nullopt;
            seconds -= (sign == '+' ? 1 : -1) * (hours * 3600 + minutes * 60);
        } else if (sign != 'Z' && sign != 'z') {
            return std::nullopt;
        }
        if (!in.rest.empty()) return std::nullopt;
    }
    // Two stamps must differ by less than int64 nanoseconds hold: plant history lies within 1900 to 2150.
    if (year < 1900 || year > 2150) return std::nullopt;
    stamp.nanoseconds = seconds * 1'000'000'000 + ns;
    return stamp;
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
