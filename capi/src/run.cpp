// The blocks. No exception is thrown here and nothing allocates, so there is no guard either.
#include "tauwright/run.h"

#include <cstdint>
#include <new>

#include "blocks.hpp"
#include "coefficients.hpp"
#include "enums.hpp"

namespace shell = tauwright::shell;
namespace run = tauwright::run;
using shell::check_memory;
using shell::known_part;
using shell::Magic;
using shell::on_block;
using enum tauwright::error_code;

TAUW_SAME(TAUW_MODE_MANUAL, run::Mode::manual);
TAUW_SAME(TAUW_MODE_AUTOMATIC, run::Mode::automatic);
TAUW_SAME(TAUW_FLAG_BAD_INPUT, run::flag_bad_input);
TAUW_SAME(TAUW_FLAG_LIMITED_LOW, run::flag_limited_low);
TAUW_SAME(TAUW_FLAG_LIMITED_HIGH, run::flag_limited_high);
TAUW_SAME(TAUW_FLAG_MANUAL, run::flag_manual);

struct tauw_pid_block {
    static constexpr auto kind = Magic::pid_block;
    static constexpr const char* null_text = "block is NULL; give a block that was set up, or a place for one";
    static constexpr const char* wrong_text = "block is no block of this kind; give one that its _init set up";
    Magic magic = kind;
    run::PidBlock value;
};
struct tauw_process_block {
    static constexpr auto kind = Magic::process_block;
    static constexpr const char* null_text = "block is NULL; give a block that was set up, or a place for one";
    static constexpr const char* wrong_text = "block is no block of this kind; give one that its _init set up";
    Magic magic = kind;
    run::ProcessBlock value;
};
static_assert(shell::plain_block<tauw_pid_block> && shell::plain_block<tauw_process_block>);

namespace {

constexpr std::int64_t longest_delay_scans = 10000000;

bool all_finite(const run::PidCoefficients& c) noexcept {
    for (double x : {c.gain, c.setpoint_weight, c.integral_per_scan, c.derivative_per_scan, c.derivative_smoothing,
                     c.measurement_smoothing, c.tracking_per_scan})
        if (!tauwright::is_finite(x)) return false;
    return !tauwright::is_nan(c.output_change_per_scan);
}

bool all_finite(const run::ProcessCoefficients& c) noexcept {
    for (int i = 0; i < 2; ++i)
        for (double x : {c.growth[i][0], c.growth[i][1], c.now[i], c.before[i], c.outputs[i]})
            if (!tauwright::is_finite(x)) return false;
    return tauwright::is_finite(c.direct);
}

bool delay_in_reach(const run::ProcessCoefficients& c) noexcept {
    return c.delay_scans >= 0 && c.delay_scans <= longest_delay_scans;
}

}  // namespace

int32_t tauw_pid_coefficients_defaults(tauw_pid_coefficients* coefficients, uint32_t size) {
    return shell::fill_defaults(coefficients, size);
}
int32_t tauw_process_coefficients_defaults(tauw_process_coefficients* coefficients, uint32_t size) {
    return shell::fill_defaults(coefficients, size);
}

size_t tauw_pid_block_size(void) { return sizeof(tauw_pid_block); }
size_t tauw_pid_block_align(void) { return alignof(tauw_pid_block); }
size_t tauw_process_block_size(void) { return sizeof(tauw_process_block); }
size_t tauw_process_block_align(void) { return alignof(tauw_process_block); }

int32_t tauw_pid_block_init(void* memory, size_t size, const tauw_pid_coefficients* coefficients, double output_low,
                            double output_high, const double* initial_output, tauw_pid_block** block,
                            tauw_error* error) {
    if (const int32_t status = check_memory(memory, size, coefficients, block, error); status != TAUW_OK) return status;
    const run::PidCoefficients c = shell::pid_coefficients(known_part(*coefficients));
    if (!all_finite(c)) return shell::report(error, not_finite, "coefficients are not all finite; give finite ones");
    if (c.output_change_per_scan < 0.0)
        return shell::report(error, out_of_domain,
                             "coefficients.output_change_per_scan is below 0; give 0 or above, infinity for no limit");
    if (!tauwright::is_finite(output_low) || !tauwright::is_finite(output_high) ||
        (initial_output != nullptr && !tauwright::is_finite(*initial_output)))
        return shell::report(error, not_finite,
                             "output_low, output_high or initial_output is not finite; give finite numbers");
    if (!(output_low < output_high))
        return shell::report(error, out_of_domain, "output_low is not below output_high; give the lower limit first");
    *block = new (memory) tauw_pid_block{
        .value = initial_output == nullptr ? run::PidBlock(c, output_low, output_high)
                                           : run::PidBlock(c, output_low, output_high, *initial_output)};
    return shell::report(error, ok, "");
}

int32_t tauw_pid_block_step(tauw_pid_block* block, double setpoint, double process_value, double* output,
                            tauw_error* error) {
    const auto step = [&](run::PidBlock& b) noexcept { return *output = b.step(setpoint, process_value), ok; };
    return on_block(block, error, step, output);
}

int32_t tauw_pid_block_to_manual(tauw_pid_block* block, tauw_error* error) {
    return on_block(block, error, [](run::PidBlock& b) noexcept { return b.to_manual(), ok; });
}

int32_t tauw_pid_block_to_automatic(tauw_pid_block* block, tauw_error* error) {
    return on_block(block, error, [](run::PidBlock& b) noexcept { return b.to_automatic(), ok; });
}

int32_t tauw_pid_block_set_manual_output(tauw_pid_block* block, double output, tauw_error* error) {
    return on_block(block, error, [&](run::PidBlock& b) noexcept { return b.set_manual_output(output); });
}

int32_t tauw_pid_block_flags(const tauw_pid_block* block, uint32_t* flags, tauw_error* error) {
    return on_block(block, error, [&](const run::PidBlock& b) noexcept { return *flags = b.flags(), ok; }, flags);
}

int32_t tauw_pid_block_mode(const tauw_pid_block* block, int32_t* mode, tauw_error* error) {
    const auto ask = [&](const run::PidBlock& b) noexcept { return *mode = static_cast<int32_t>(b.mode()), ok; };
    return on_block(block, error, ask, mode);
}

int32_t tauw_pid_block_output(const tauw_pid_block* block, double* output, tauw_error* error) {
    return on_block(block, error, [&](const run::PidBlock& b) noexcept { return *output = b.output(), ok; }, output);
}

int32_t tauw_pid_block_integral(const tauw_pid_block* block, double* integral, tauw_error* error) {
    const auto ask = [&](const run::PidBlock& b) noexcept { return *integral = b.integral(), ok; };
    return on_block(block, error, ask, integral);
}

int32_t tauw_delay_line_length(const tauw_process_coefficients* coefficients, size_t* length, tauw_error* error) {
    return shell::guard(error, [&] {
        size_t& result = shell::given(length, "length");
        const run::ProcessCoefficients c = shell::process_coefficients(shell::read(coefficients, "coefficients"));
        if (!delay_in_reach(c))
            tauwright::detail::refuse(out_of_domain, "coefficients.delay_scans", static_cast<double>(c.delay_scans),
                                      "give 0 to 10000000");
        result = run::delay_line_length(c);
    });
}

int32_t tauw_process_block_init(void* memory, size_t size, const tauw_process_coefficients* coefficients,
                                double rest_output, double rest_process_value, double* delay_line, size_t length,
                                tauw_process_block** block, tauw_error* error) {
    if (const int32_t status = check_memory(memory, size, coefficients, block, error); status != TAUW_OK) return status;
    const run::ProcessCoefficients c = shell::process_coefficients(known_part(*coefficients));
    if (!all_finite(c)) return shell::report(error, not_finite, "coefficients are not all finite; give finite ones");
    if (!delay_in_reach(c))
        return shell::report(error, out_of_domain, "coefficients.delay_scans is out of reach; give 0 to 10000000");
    if (!tauwright::is_finite(rest_output) || !tauwright::is_finite(rest_process_value))
        return shell::report(error, not_finite,
                             "rest_output or rest_process_value is not finite; give finite numbers");
    run::ProcessBlock made(c, rest_output, rest_process_value);
    if (const auto code = made.start(delay_line, length); code != ok)
        return shell::report(error, code,
                             code == null_pointer ? "delay_line is NULL; give memory for it"
                                                  : "length is too small; give what tauw_delay_line_length says");
    *block = new (memory) tauw_process_block{.value = made};
    return shell::report(error, ok, "");
}

int32_t tauw_process_block_step(tauw_process_block* block, double output, double* delay_line, size_t length,
                                double* process_value, tauw_error* error) {
    const auto step = [&](run::ProcessBlock& b) noexcept {
        if (length < run::delay_line_length(b.coefficients())) return buffer_too_small;
        *process_value = b.step(output, delay_line);
        return ok;
    };
    return on_block(block, error, step, delay_line, process_value);
}

int32_t tauw_process_block_process_value(const tauw_process_block* block, double* process_value, tauw_error* error) {
    const auto ask = [&](const run::ProcessBlock& b) noexcept { return *process_value = b.process_value(), ok; };
    return on_block(block, error, ask, process_value);
}
