// Trends of many loops into the caller's tables.
#include <stdexcept>

#include "convert.hpp"
#include "handles.hpp"
#include "tauwright/assess.h"
#include "tauwright/assess/simulate_many.hpp"

namespace shell = tauwright::shell;
using tauwright::LoopToSimulate;

namespace {

// The settings are as far apart as the caller's struct is long.
std::vector<LoopToSimulate> loops_of(const tauw_model* const* processes, const tauw_pid_settings* settings, std::size_t count) {
    const auto handles = shell::copied(processes, count, "processes");
    shell::array(settings, count, "settings");
    std::vector<LoopToSimulate> loops;
    if (count == 0) return loops;
    shell::require_known_size(*settings, "settings[0]");
    if (count > PTRDIFF_MAX / settings->struct_size) throw std::length_error("loops");
    loops.reserve(count);
    const auto* bytes = reinterpret_cast<const unsigned char*>(settings);
    for (std::size_t i = 0; i < count; ++i) {
        const auto* at = reinterpret_cast<const tauw_pid_settings*>(bytes + i * settings->struct_size);
        const std::string place = "[" + std::to_string(i) + "]";
        const tauwright::TransferFunction& process = shell::live(handles[i], ("processes" + place).c_str()).value;
        loops.push_back({process, shell::settings(at, ("settings" + place).c_str())});
    }
    return loops;
}

std::span<double> table(double* values, std::size_t length, const char* name) {
    shell::array(values, length, name);
    return {values, length};
}

}  // namespace

int32_t tauw_scans_of(const tauw_duty* duty, double horizon_s, size_t* scans, tauw_error* error) {
    return shell::guard(error, [&] {
        std::size_t& result = shell::given(scans, "scans");
        result = tauwright::scans_of(shell::duty(duty), horizon_s);
    });
}

int32_t tauw_simulate_many(const tauw_model* const* processes, const tauw_pid_settings* settings, size_t loops,
                           const tauw_duty* duty, double horizon_s, double* process_value, double* output,
                           size_t length, tauw_error* error) {
    return shell::guard(error, [&] {
        const std::vector<LoopToSimulate> all = loops_of(processes, settings, loops);
        tauwright::simulate_many(all, shell::duty(duty), horizon_s, table(process_value, length, "process_value"),
                                 table(output, length, "output"));
    });
}
