// Processes with their input held, and the coefficients of valves and transmitters.
#include <complex>

#include "coefficients.hpp"
#include "convert.hpp"
#include "enums.hpp"
#include "handles.hpp"
#include "results.hpp"
#include "tauwright/discretize.h"
#include "tauwright/discretize/held.hpp"

namespace shell = tauwright::shell;
using tauwright::Between;
using tauwright::DiscreteTransferFunction;

TAUW_SAME(TAUW_BETWEEN_CONSTANT, Between::constant);
TAUW_SAME(TAUW_BETWEEN_LINEAR, Between::linear);

namespace {

// The standard lays a complex number out as two: real part, imaginary part.
const double* flat(const std::vector<std::complex<double>>& roots) noexcept {
    return reinterpret_cast<const double*>(roots.data());
}

}  // namespace

int32_t tauw_discrete_parts_defaults(tauw_discrete_parts* parts, uint32_t size) {
    return shell::fill_defaults(parts, size);
}
int32_t tauw_valve_settings_defaults(tauw_valve_settings* valve, uint32_t size) {
    return shell::fill_defaults(valve, size);
}
int32_t tauw_transmitter_settings_defaults(tauw_transmitter_settings* transmitter, uint32_t size) {
    return shell::fill_defaults(transmitter, size);
}

int32_t tauw_discretize_valve(const tauw_valve_settings* valve, double scan_time, double position_low,
                              double position_high, tauw_valve_coefficients* coefficients, tauw_error* error) {
    return shell::guard(error, [&] {
        shell::Result<tauw_valve_coefficients> result(coefficients, "coefficients");
        result.give(shell::from(
            tauwright::discretize(shell::valve_settings(valve), scan_time, position_low, position_high)));
    });
}

int32_t tauw_discretize_transmitter(const tauw_transmitter_settings* transmitter, double scan_time, double noise,
                                    uint64_t seed, tauw_transmitter_coefficients* coefficients, tauw_error* error) {
    return shell::guard(error, [&] {
        shell::Result<tauw_transmitter_coefficients> result(coefficients, "coefficients");
        result.give(
            shell::from(tauwright::discretize(shell::transmitter_settings(transmitter), scan_time, noise, seed)));
    });
}

int32_t tauw_held(const tauw_model* process, double scan_time, int32_t between, tauw_discrete** discrete,
                  tauw_error* error) {
    return shell::guard(error, [&] {
        shell::Made<tauw_discrete> made(discrete, "discrete");
        const tauwright::TransferFunction& g = shell::live(process, "process").value;
        const Between meant = shell::choice(between, Between::linear, "between", "0 (constant), 1 (linear)");
        made.give(tauwright::held(g, scan_time, meant));
    });
}

int32_t tauw_discrete_at(const tauw_discrete* discrete, const double* z_real, const double* z_imaginary, size_t n,
                         double* value_real, double* value_imaginary, tauw_error* error) {
    return shell::guard(error, [&] {
        const DiscreteTransferFunction& h = shell::live(discrete, "discrete").value;
        shell::evaluate(h, {z_real, z_imaginary, n, value_real, value_imaginary, "z_real", "z_imaginary"});
    });
}

int32_t tauw_discrete_at_offset(const tauw_discrete* discrete, const double* offset_real,
                                const double* offset_imaginary, size_t n, double* value_real, double* value_imaginary,
                                tauw_error* error) {
    return shell::guard(error, [&] {
        const DiscreteTransferFunction& h = shell::live(discrete, "discrete").value;
        shell::evaluate([&](std::complex<double> offset) { return h.at_offset(offset); },
                        {offset_real, offset_imaginary, n, value_real, value_imaginary, "offset_real", "offset_imaginary"});
    });
}

int32_t tauw_discrete_at_frequency(const tauw_discrete* discrete, const double* frequency_rad_s, size_t n,
                                   double* value_real, double* value_imaginary, tauw_error* error) {
    return shell::guard(error, [&] {
        const DiscreteTransferFunction& h = shell::live(discrete, "discrete").value;
        shell::array(frequency_rad_s, n, "frequency_rad_s");
        shell::array(value_real, n, "value_real");
        shell::array(value_imaginary, n, "value_imaginary");
        for (size_t i = 0; i < n; ++i) {
            const std::complex<double> value = h.at_frequency(frequency_rad_s[i]);
            value_real[i] = value.real();
            value_imaginary[i] = value.imag();
        }
    });
}

int32_t tauw_discrete_view(const tauw_discrete* discrete, tauw_discrete_parts* parts, tauw_error* error) {
    return shell::guard(error, [&] {
        const DiscreteTransferFunction& h = shell::live(discrete, "discrete").value;
        shell::Result<tauw_discrete_parts> result(parts, "parts");
        tauw_discrete_parts c = shell::blank<tauw_discrete_parts>();
        c.between = static_cast<int32_t>(h.between());
        c.scan_time = h.scan_time();
        c.order = h.order();
        c.delay_scans = h.delay_scans();
        c.steady_gain = h.steady_gain();
        c.leading = h.leading();
        c.factored_error = h.factored_error();
        c.direct_now = h.direct_now();
        c.direct_before = h.direct_before();
        c.growth = h.growth().data();
        c.now = h.now().data();
        c.before = h.before().data();
        c.ahead = h.ahead().data();
        c.outputs = h.outputs().data();
        c.pole_offsets = flat(h.pole_offsets());
        c.pole_count = h.pole_offsets().size();
        c.zero_offsets = flat(h.zero_offsets());
        c.zero_count = h.zero_offsets().size();
        result.give(c);
    });
}

int32_t tauw_discrete_destroy(tauw_discrete** discrete) { return shell::destroy(discrete); }
