// Valve and transmitter blocks. No exception is thrown here and nothing allocates, so there is no guard either.
#include <new>

#include "blocks.hpp"
#include "coefficients.hpp"
#include "tauwright/core/finite.hpp"

namespace shell = tauwright::shell;
namespace run = tauwright::run;
using shell::on_block;
using tauwright::is_finite;
using enum tauwright::error_code;

struct tauw_valve {
    static constexpr auto kind = shell::Magic::valve;
    static constexpr const char* null_text = "valve is NULL; give a valve that was set up, or a place for one";
    static constexpr const char* wrong_text = "valve is no valve; give one that tauw_valve_init set up";
    shell::Magic magic = kind;
    run::Valve value;
};
struct tauw_transmitter {
    static constexpr auto kind = shell::Magic::transmitter;
    static constexpr const char* null_text =
        "transmitter is NULL; give a transmitter that was set up, or a place for one";
    static constexpr const char* wrong_text =
        "transmitter is no transmitter; give one that tauw_transmitter_init set up";
    shell::Magic magic = kind;
    run::Transmitter value;
};
static_assert(shell::plain_block<tauw_valve> && shell::plain_block<tauw_transmitter>);

int32_t tauw_valve_coefficients_defaults(tauw_valve_coefficients* coefficients, uint32_t size) {
    return shell::fill_defaults(coefficients, size);
}
int32_t tauw_transmitter_coefficients_defaults(tauw_transmitter_coefficients* coefficients, uint32_t size) {
    return shell::fill_defaults(coefficients, size);
}

size_t tauw_valve_size(void) { return sizeof(tauw_valve); }
size_t tauw_valve_align(void) { return alignof(tauw_valve); }
size_t tauw_transmitter_size(void) { return sizeof(tauw_transmitter); }
size_t tauw_transmitter_align(void) { return alignof(tauw_transmitter); }

int32_t tauw_valve_init(void* memory, size_t size, const tauw_valve_coefficients* coefficients,
                        double initial_position, tauw_valve** valve, tauw_error* error) {
    if (const int32_t status = shell::check_memory(memory, size, coefficients, valve, error); status != TAUW_OK)
        return status;
    const run::ValveCoefficients c = shell::valve_coefficients(shell::known_part(*coefficients));
    for (double x : {c.dead_band, c.stick, c.resolution, c.position_low, c.position_high, initial_position})
        if (!is_finite(x))
            return shell::report(error, not_finite,
                                 "a coefficient or initial_position is not finite; give finite numbers");
    if (tauwright::is_nan(c.travel_per_scan))
        return shell::report(error, not_finite,
                             "coefficients.travel_per_scan is no number; give one above 0, infinity for no limit");
    if (c.dead_band < 0.0 || c.stick < 0.0 || c.resolution < 0.0 || !(c.travel_per_scan > 0.0))
        return shell::report(error, out_of_domain,
                             "coefficients hold a size below 0 or no travel_per_scan above 0; give what "
                             "tauw_discretize_valve makes");
    if (!(c.position_low < c.position_high))
        return shell::report(error, out_of_domain,
                             "coefficients.position_low is not below position_high; give the lower end first");
    *valve = new (memory) tauw_valve{.value = run::Valve(c, initial_position)};
    return shell::report(error, ok, "");
}

int32_t tauw_valve_step(tauw_valve* valve, double demand, double* position, tauw_error* error) {
    return on_block(valve, error, [&](run::Valve& v) noexcept { return *position = v.step(demand), ok; }, position);
}

int32_t tauw_valve_position(const tauw_valve* valve, double* position, tauw_error* error) {
    return on_block(valve, error, [&](const run::Valve& v) noexcept { return *position = v.position(), ok; }, position);
}

int32_t tauw_transmitter_init(void* memory, size_t size, const tauw_transmitter_coefficients* coefficients,
                              double initial_value, tauw_transmitter** transmitter, tauw_error* error) {
    if (const int32_t status = shell::check_memory(memory, size, coefficients, transmitter, error); status != TAUW_OK)
        return status;
    const run::TransmitterCoefficients c = shell::transmitter_coefficients(shell::known_part(*coefficients));
    for (double x : {c.smoothing, c.noise, c.resolution, initial_value})
        if (!is_finite(x))
            return shell::report(error, not_finite,
                                 "a coefficient or initial_value is not finite; give finite numbers");
    if (c.noise < 0.0 || c.resolution < 0.0 || !(c.smoothing > 0.0 && c.smoothing <= 1.0))
        return shell::report(error, out_of_domain,
                             "coefficients hold a size below 0 or a smoothing outside 0 to 1; give what "
                             "tauw_discretize_transmitter makes");
    *transmitter = new (memory) tauw_transmitter{.value = run::Transmitter(c, initial_value)};
    return shell::report(error, ok, "");
}

int32_t tauw_transmitter_step(tauw_transmitter* transmitter, double process_value, double* measured,
                              tauw_error* error) {
    const auto step = [&](run::Transmitter& t) noexcept { return *measured = t.step(process_value), ok; };
    return on_block(transmitter, error, step, measured);
}

int32_t tauw_transmitter_measured(const tauw_transmitter* transmitter, double* measured, tauw_error* error) {
    const auto ask = [&](const run::Transmitter& t) noexcept { return *measured = t.measured(), ok; };
    return on_block(transmitter, error, ask, measured);
}
