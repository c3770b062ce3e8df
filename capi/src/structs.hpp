// Sized structs: which sizes are known, defaults, reading and writing by the caller's size.
#pragma once

#include <algorithm>
#include <array>
#include <cstddef>
#include <cstdint>
#include <cstring>
#include <string>
#include <type_traits>

#include "shell.hpp"
#include "tauwright/tauwright.h"

namespace tauwright::shell {

/// The sizes a struct has had since it exists, the present one last. A struct that grows gets a
/// specialization; members past the caller's size then keep their defaults.
template <class T>
inline constexpr std::array known_sizes = {std::uint32_t{sizeof(T)}};

/// The size of a struct before `member` and what follows it were appended.
#define TAUW_GREW(type, member) \
    template <>                 \
    inline constexpr std::array<std::uint32_t, 2> known_sizes<type> = {offsetof(type, member), sizeof(type)};
TAUW_GREW(tauw_pid_coefficients, output_change_per_scan)
TAUW_GREW(tauw_robustness, has_sensitivity_bandwidth)
TAUW_GREW(tauw_duty, setpoint_ramp_time)
TAUW_GREW(tauw_figures, has_rise_time)
TAUW_GREW(tauw_trend_columns, measured)
#undef TAUW_GREW

template <class T>
constexpr bool is_known_size(std::uint32_t size) noexcept {
    return std::find(known_sizes<T>.begin(), known_sizes<T>.end(), size) != known_sizes<T>.end();
}

/// The struct's name, for messages.
template <class T>
inline constexpr const char* struct_word = nullptr;
#define TAUW_STRUCT_WORD(type) \
    template <>                \
    inline constexpr const char* struct_word<type> = #type;
TAUW_STRUCT_WORD(tauw_range)
TAUW_STRUCT_WORD(tauw_factors)
TAUW_STRUCT_WORD(tauw_record_columns)
TAUW_STRUCT_WORD(tauw_identify_options)
TAUW_STRUCT_WORD(tauw_fit_summary)
TAUW_STRUCT_WORD(tauw_move)
TAUW_STRUCT_WORD(tauw_finding)
TAUW_STRUCT_WORD(tauw_pid_settings)
TAUW_STRUCT_WORD(tauw_controller_form)
TAUW_STRUCT_WORD(tauw_entered)
TAUW_STRUCT_WORD(tauw_pid_coefficients)
TAUW_STRUCT_WORD(tauw_process_coefficients)
TAUW_STRUCT_WORD(tauw_valve_coefficients)
TAUW_STRUCT_WORD(tauw_transmitter_coefficients)
TAUW_STRUCT_WORD(tauw_discrete_parts)
TAUW_STRUCT_WORD(tauw_valve_settings)
TAUW_STRUCT_WORD(tauw_transmitter_settings)
TAUW_STRUCT_WORD(tauw_robustness_options)
TAUW_STRUCT_WORD(tauw_robustness)
TAUW_STRUCT_WORD(tauw_duty)
TAUW_STRUCT_WORD(tauw_figures)
TAUW_STRUCT_WORD(tauw_trend_columns)
TAUW_STRUCT_WORD(tauw_gain_crossover)
TAUW_STRUCT_WORD(tauw_phase_crossover)
TAUW_STRUCT_WORD(tauw_delay_range)
TAUW_STRUCT_WORD(tauw_delay_budget)
TAUW_STRUCT_WORD(tauw_uncertainty_box)
TAUW_STRUCT_WORD(tauw_uncertainty_parts)
TAUW_STRUCT_WORD(tauw_worst_case_options)
TAUW_STRUCT_WORD(tauw_worst_case)
TAUW_STRUCT_WORD(tauw_violation_limits)
TAUW_STRUCT_WORD(tauw_violation_options)
TAUW_STRUCT_WORD(tauw_violating_share)
TAUW_STRUCT_WORD(tauw_valve_cycle)
TAUW_STRUCT_WORD(tauw_desired_response)
TAUW_STRUCT_WORD(tauw_obstacle)
TAUW_STRUCT_WORD(tauw_synthesis_summary)
TAUW_STRUCT_WORD(tauw_tuning_request)
TAUW_STRUCT_WORD(tauw_sheet_summary)
TAUW_STRUCT_WORD(tauw_audit_loop)
TAUW_STRUCT_WORD(tauw_audit_options)
TAUW_STRUCT_WORD(tauw_audit_row)
TAUW_STRUCT_WORD(tauw_audit_summary)
#undef TAUW_STRUCT_WORD

template <class T>
void require_known_size(const T& value, const char* name) {
    if (is_known_size<T>(value.struct_size)) return;
    const std::string type = struct_word<T>;
    throw Error(error_code::wrong_struct_size, std::string(name) + ".struct_size is " + std::to_string(value.struct_size) +
                                                   "; fill the struct with " + type + "_defaults(&" + name + ", sizeof(" +
                                                   type + ")), here " + std::to_string(sizeof(T)) + " bytes");
}

/// All zeros but the size.
template <class T>
T blank() noexcept {
    T value;
    std::memset(&value, 0, sizeof value);
    value.struct_size = sizeof value;
    return value;
}

/// The defaults; structs whose defaults are not all zeros specialize it.
template <class T>
T fresh() noexcept {
    return blank<T>();
}
template <> tauw_range fresh() noexcept;
template <> tauw_factors fresh() noexcept;
template <> tauw_pid_settings fresh() noexcept;
template <> tauw_controller_form fresh() noexcept;
template <> tauw_entered fresh() noexcept;
template <> tauw_duty fresh() noexcept;
template <> tauw_robustness fresh() noexcept;
template <> tauw_desired_response fresh() noexcept;
template <> tauw_audit_options fresh() noexcept;
template <> tauw_pid_coefficients fresh() noexcept;
template <> tauw_valve_coefficients fresh() noexcept;
template <> tauw_transmitter_coefficients fresh() noexcept;
template <> tauw_worst_case_options fresh() noexcept;
template <> tauw_worst_case fresh() noexcept;
template <> tauw_violation_options fresh() noexcept;
template <> tauw_valve_cycle fresh() noexcept;

/// The body of tauw_<x>_defaults.
template <class T>
std::int32_t fill_defaults(T* target, std::uint32_t size) noexcept {
    static_assert(std::is_trivially_copyable_v<T> && std::is_standard_layout_v<T>);
    if (target == nullptr) return TAUW_ERROR_NULL_POINTER;
    if (!is_known_size<T>(size)) return TAUW_ERROR_WRONG_STRUCT_SIZE;
    T value = fresh<T>();
    value.struct_size = size;
    std::memcpy(target, &value, size);
    return TAUW_OK;
}

/// The caller's struct, as far as the caller knows it, over the defaults.
template <class T>
T read(const T* source, const char* name) {
    require_known_size(given(source, name), name);
    T value = fresh<T>();
    std::memcpy(&value, source, std::min<std::size_t>(source->struct_size, sizeof value));
    if constexpr (requires { value.reserved; }) {
        if (value.reserved != 0)
            detail::refuse(error_code::out_of_domain, std::string(name) + ".reserved", value.reserved, "give 0");
    }
    return value;
}

/// A struct of the caller's that waits for a result; checked before the work, written after it.
template <class T>
class Result {
public:
    Result(T* target, const char* name) : target_(given(target, name)) { require_known_size(target_, name); }

    void give(T value) noexcept {
        const std::uint32_t size = target_.struct_size;
        value.struct_size = size;
        std::memcpy(&target_, &value, size);
    }

private:
    T& target_;
};

/// A member that must be 0 or 1.
inline bool flag(std::int32_t value, const std::string& name) {
    if (value != 0 && value != 1) detail::refuse(error_code::unknown_name, name, value, "give 0 for no or 1 for yes");
    return value == 1;
}

/// What a callback of the caller's returned: 1 to go on, 0 to end.
inline bool goes_on(std::int32_t value, const char* name) {
    if (value != 0 && value != 1)
        throw Error(error_code::unknown_name,
                    std::string(name) + " returned " + std::to_string(value) + "; return 1 to go on or 0 to end");
    return value == 1;
}

/// An enumeration value 0 .. last; `offered` lists them for the message.
template <class E>
E choice(std::int32_t value, E last, const std::string& name, const char* offered) {
    if (value < 0 || value > static_cast<std::int32_t>(last))
        detail::refuse(error_code::unknown_name, name, value, std::string("give one of ") + offered);
    return static_cast<E>(value);
}

}  // namespace tauwright::shell
