// What firmware would compile: the run floor, discretize/pid.hpp and control/pid_settings.hpp.
// Built without exceptions and RTTI by flags.cmake; never executed.
#include <type_traits>

#include "tauwright/discretize/pid.hpp"
#include "tauwright/run/run.hpp"

using namespace tauwright;

static_assert(std::is_trivially_copyable_v<run::PidBlock>);
static_assert(std::is_trivially_copyable_v<run::ProcessBlock>);
static_assert(std::is_trivially_copyable_v<run::PidCoefficients>);
static_assert(std::is_trivially_copyable_v<run::ProcessCoefficients>);
static_assert(std::is_trivially_copyable_v<run::Valve>);
static_assert(std::is_trivially_copyable_v<run::ValveCoefficients>);
static_assert(std::is_trivially_copyable_v<run::Transmitter>);
static_assert(std::is_trivially_copyable_v<run::TransmitterCoefficients>);

extern "C" int run_alone_start(run::PidBlock* block, double gain, double integral_time, double scan_time) {
    run::PidCoefficients coefficients;
    const PidSettings settings{.gain = gain, .integral_time = integral_time};
    const error_code code = discretize(settings, scan_time, coefficients);
    if (code == error_code::ok) *block = run::PidBlock(coefficients, 0.0, 100.0, 40.0);
    return static_cast<int>(code);
}

extern "C" double run_alone_step(run::PidBlock* block, run::ProcessBlock* process, double* line, double setpoint) {
    const double output = block->step(setpoint, process->process_value());
    return process->step(output, line);
}

extern "C" double run_alone_loop(run::PidBlock* block, run::Valve* valve, run::ProcessBlock* process,
                                 run::Transmitter* transmitter, double* line, double setpoint) {
    const double measured = transmitter->step(process->process_value());
    return process->step(valve->step(block->step(setpoint, measured)), line);
}

extern "C" void run_alone_mode(run::PidBlock* block, int automatic, double output) {
    if (automatic != 0) block->to_automatic();
    else block->to_manual();
    if (block->set_manual_output(output) != error_code::ok) block->to_manual();
}
