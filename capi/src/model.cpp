#include "tauwright/model.h"

#include "convert.hpp"
#include "handles.hpp"
#include "results.hpp"
#include "tauwright/model/forms.hpp"

namespace shell = tauwright::shell;
using tauwright::QuadraticFactor;
using tauwright::TransferFunction;

namespace {

std::vector<QuadraticFactor> pairs(const double* flat, size_t count, const char* name) {
    if (count > PTRDIFF_MAX / sizeof(QuadraticFactor)) throw std::length_error(name);
    const std::vector<double> numbers = shell::copied(flat, 2 * count, name);
    std::vector<QuadraticFactor> result;
    for (size_t i = 0; i < count; ++i) result.push_back({.time_constant = numbers[2 * i], .damping = numbers[2 * i + 1]});
    return result;
}

template <class Build>
int32_t build(tauw_model** model, tauw_error* error, const Build& make) {
    return shell::guard(error, [&] {
        shell::Made<tauw_model> made(model, "model");
        made.give(make());
    });
}

}  // namespace

int32_t tauw_factors_defaults(tauw_factors* factors, uint32_t size) { return shell::fill_defaults(factors, size); }

int32_t tauw_first_order_plus_dead_time(double gain, double lag, double dead_time, tauw_model** model,
                                        tauw_error* error) {
    return build(model, error, [&] { return tauwright::first_order_plus_dead_time(gain, lag, dead_time); });
}

int32_t tauw_second_order_plus_dead_time(double gain, double lag_1, double lag_2, double dead_time, tauw_model** model,
                                         tauw_error* error) {
    return build(model, error, [&] { return tauwright::second_order_plus_dead_time(gain, lag_1, lag_2, dead_time); });
}

int32_t tauw_integrating_plus_dead_time(double slope, double dead_time, double lag, tauw_model** model,
                                        tauw_error* error) {
    return build(model, error, [&] { return tauwright::integrating_plus_dead_time(slope, dead_time, lag); });
}

int32_t tauw_oscillatory_plus_dead_time(double gain, double time_constant, double damping, double dead_time,
                                        tauw_model** model, tauw_error* error) {
    return build(model, error,
                 [&] { return tauwright::oscillatory_plus_dead_time(gain, time_constant, damping, dead_time); });
}

int32_t tauw_model_from_factors(const tauw_factors* factors, tauw_model** model, tauw_error* error) {
    return build(model, error, [&] {
        const tauw_factors c = shell::read(factors, "factors");
        return TransferFunction::from_factors({.gain = c.gain,
                                               .integrators = c.integrators,
                                               .zeros_at_origin = c.zeros_at_origin,
                                               .leads = shell::copied(c.leads, c.lead_count, "factors.leads"),
                                               .lags = shell::copied(c.lags, c.lag_count, "factors.lags"),
                                               .lead_pairs = pairs(c.lead_pairs, c.lead_pair_count, "factors.lead_pairs"),
                                               .lag_pairs = pairs(c.lag_pairs, c.lag_pair_count, "factors.lag_pairs"),
                                               .dead_time = c.dead_time});
    });
}

int32_t tauw_model_from_polynomials(const double* numerator, size_t numerator_count, const double* denominator,
                                    size_t denominator_count, double dead_time, tauw_model** model, tauw_error* error) {
    return build(model, error, [&] {
        shell::array(numerator, numerator_count, "numerator");
        shell::array(denominator, denominator_count, "denominator");
        return TransferFunction::from_polynomials({numerator, numerator_count}, {denominator, denominator_count},
                                                  dead_time);
    });
}

int32_t tauw_model_product(const tauw_model* first, const tauw_model* second, tauw_model** model, tauw_error* error) {
    return build(model, error,
                 [&] { return shell::live(first, "first").value * shell::live(second, "second").value; });
}

int32_t tauw_in_percent(const tauw_model* process, const tauw_range* process_value_range,
                        const tauw_range* output_range, tauw_model** model, tauw_error* error) {
    return build(model, error, [&] {
        return tauwright::in_percent(shell::live(process, "process").value,
                                     shell::range(process_value_range, "process_value_range"),
                                     shell::range(output_range, "output_range"));
    });
}

int32_t tauw_model_at(const tauw_model* model, const double* s_real, const double* s_imaginary, size_t n,
                      double* value_real, double* value_imaginary, tauw_error* error) {
    return shell::guard(error, [&] {
        shell::evaluate(shell::live(model, "model").value, {s_real, s_imaginary, n, value_real, value_imaginary});
    });
}

int32_t tauw_step_response(const tauw_model* process, const double* time_s, size_t n, double* response,
                           tauw_error* error) {
    return shell::guard(error, [&] {
        const TransferFunction& g = shell::live(process, "process").value;
        shell::array(time_s, n, "time_s");
        shell::array(response, n, "response");
        shell::give_array(tauwright::step_response(g, {time_s, n}), response, n, &n, "response");
    });
}

int32_t tauw_model_steady_gain(const tauw_model* model, double* steady_gain, tauw_error* error) {
    return shell::guard(error, [&] {
        const TransferFunction& g = shell::live(model, "model").value;
        shell::given(steady_gain, "steady_gain") = g.steady_gain();
    });
}

int32_t tauw_model_view(const tauw_model* model, tauw_factors* factors, tauw_error* error) {
    return shell::guard(error, [&] {
        const tauw_model& handle = shell::live(model, "model");
        shell::Result<tauw_factors> result(factors, "factors");
        const tauwright::Factors& f = handle.value.factors();
        tauw_factors c = shell::blank<tauw_factors>();
        c.gain = f.gain;
        c.dead_time = f.dead_time;
        c.integrators = f.integrators;
        c.zeros_at_origin = f.zeros_at_origin;
        c.leads = f.leads.data();
        c.lead_count = f.leads.size();
        c.lags = f.lags.data();
        c.lag_count = f.lags.size();
        c.lead_pairs = handle.lead_pairs.data();
        c.lead_pair_count = f.lead_pairs.size();
        c.lag_pairs = handle.lag_pairs.data();
        c.lag_pair_count = f.lag_pairs.size();
        result.give(c);
    });
}

int32_t tauw_model_text(const tauw_model* model, char* text, size_t capacity, size_t* needed, tauw_error* error) {
    return shell::guard(error, [&] {
        shell::give_text(shell::live(model, "model").value.text(), text, capacity, needed);
    });
}

int32_t tauw_model_destroy(tauw_model** model) { return shell::destroy(model); }
