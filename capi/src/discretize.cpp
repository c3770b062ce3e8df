#include "tauwright/discretize.h"

#include "coefficients.hpp"
#include "convert.hpp"
#include "handles.hpp"
#include "tauwright/discretize/process.hpp"

namespace shell = tauwright::shell;

int32_t tauw_discretize_pid(const tauw_pid_settings* settings, double scan_time, tauw_pid_coefficients* coefficients,
                            tauw_error* error) {
    return shell::guard(error, [&] {
        shell::Result<tauw_pid_coefficients> result(coefficients, "coefficients");
        result.give(shell::from(tauwright::discretize(shell::settings(settings), scan_time)));
    });
}

int32_t tauw_discretize_process(const tauw_model* process, double scan_time, tauw_process_coefficients* coefficients,
                                tauw_error* error) {
    return shell::guard(error, [&] {
        const tauwright::TransferFunction& g = shell::live(process, "process").value;
        shell::Result<tauw_process_coefficients> result(coefficients, "coefficients");
        result.give(shell::from(tauwright::discretize(g, scan_time)));
    });
}
