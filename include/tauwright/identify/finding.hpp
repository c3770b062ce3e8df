// What a record says beside its model: findings as values, and the advice they add up to.
#pragma once

#include <cstddef>
#include <cstdint>
#include <string>
#include <string_view>
#include <vector>

namespace tauwright {
inline namespace v0 {

/// From the mildest to the one that overrules all others.
enum class Advice : std::int32_t {
    tune = 0,
    tune_with_care = 1,
    test_again = 2,
    repair_measurement = 3,
    repair_valve = 4,
    leave_alone = 5,
};

enum class FindingCode : std::int32_t {
    no_move = 1,
    below_noise = 2,
    ends_early = 3,
    not_steady_at_start = 4,
    output_clipped = 5,
    bad_samples_left_out = 6,
    output_moved_by_controller = 7,
    gain_differs = 8,
    model_does_not_fit = 9,
};

/// The word of a code, for example "no_move".
constexpr const char* name_of(FindingCode code) noexcept {
    switch (code) {
        case FindingCode::no_move: return "no_move";
        case FindingCode::below_noise: return "below_noise";
        case FindingCode::ends_early: return "ends_early";
        case FindingCode::not_steady_at_start: return "not_steady_at_start";
        case FindingCode::output_clipped: return "output_clipped";
        case FindingCode::bad_samples_left_out: return "bad_samples_left_out";
        case FindingCode::output_moved_by_controller: return "output_moved_by_controller";
        case FindingCode::gain_differs: return "gain_differs";
        case FindingCode::model_does_not_fit: return "model_does_not_fit";
    }
    return "unknown";
}

constexpr const char* name_of(Advice advice) noexcept {
    switch (advice) {
        case Advice::tune: return "tune";
        case Advice::tune_with_care: return "tune_with_care";
        case Advice::test_again: return "test_again";
        case Advice::repair_measurement: return "repair_measurement";
        case Advice::repair_valve: return "repair_valve";
        case Advice::leave_alone: return "leave_alone";
    }
    return "unknown";
}

/// One thing found in a record.
struct Finding {
    FindingCode code = FindingCode::no_move;
    Advice advice = Advice::tune;
    std::string message = {};   ///< what was found and what to do next
    double value = 0.0;         ///< the number that shows it; the message says its meaning
    std::size_t first = 0;      ///< samples first .. last (both included) show it
    std::size_t last = 0;
};

/// The gravest advice among the findings; `tune` where there are none.
inline Advice advice_of(const std::vector<Finding>& findings) noexcept {
    Advice gravest = Advice::tune;
    for (const Finding& f : findings) gravest = f.advice > gravest ? f.advice : gravest;
    return gravest;
}

}  // namespace v0
}  // namespace tauwright
