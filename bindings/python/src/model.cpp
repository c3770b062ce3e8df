#include "bind.hpp"

namespace binding {

namespace {

using tw::TransferFunction;

std::vector<tw::QuadraticFactor> pairs_from(const char* name, const py::iterable& pairs) {
    std::vector<tw::QuadraticFactor> factors;
    for (const py::handle item : pairs) {
        const auto pair = numbers_from((std::string(name) + "[" + std::to_string(factors.size()) + "]").c_str(), item);
        if (pair.size() != 2)
            throw tw::Error(tw::error_code::wrong_length, std::string(name) + "[" + std::to_string(factors.size()) + "] has " +
                                                              std::to_string(pair.size()) +
                                                              " numbers; give (time_constant, damping)");
        factors.push_back({pair[0], pair[1]});
    }
    return factors;
}

py::tuple tuple_of_pairs(const std::vector<tw::QuadraticFactor>& factors) {
    py::tuple pairs(factors.size());
    for (std::size_t i = 0; i < factors.size(); ++i) pairs[i] = py::make_tuple(factors[i].time_constant, factors[i].damping);
    return pairs;
}

py::array_t<Complex> roots(const std::vector<Complex>& values) {
    return py::array_t<Complex>(static_cast<py::ssize_t>(values.size()), values.data());
}

TransferFunction from_factors(double gain, int integrators, int zeros_at_origin, const py::object& leads,
                              const py::object& lags, const py::iterable& lead_pairs, const py::iterable& lag_pairs,
                              double dead_time) {
    return TransferFunction::from_factors({.gain = gain,
                                           .integrators = integrators,
                                           .zeros_at_origin = zeros_at_origin,
                                           .leads = numbers_from("leads", leads),
                                           .lags = numbers_from("lags", lags),
                                           .lead_pairs = pairs_from("lead_pairs", lead_pairs),
                                           .lag_pairs = pairs_from("lag_pairs", lag_pairs),
                                           .dead_time = dead_time});
}

TransferFunction from_polynomials(const py::object& numerator, const py::object& denominator, double dead_time) {
    const auto above = numbers_from("numerator", numerator), below = numbers_from("denominator", denominator);
    const py::gil_scoped_release released;
    return TransferFunction::from_polynomials(above, below, dead_time);
}

void bind_class(py::module_& m) {
    using F = TransferFunction;
    py::class_<F>(m, "TransferFunction",
                  "A linear process with exact dead time, held as factors in time-constant form. Immutable.\n\n"
                  "Times in seconds, s in rad/s. Make one with a builder such as first_order_plus_dead_time, with\n"
                  "from_factors or with from_polynomials; a * b puts two in series; G(s) evaluates at a complex\n"
                  "number or at every element of an array.")
        .def_static("from_factors", &from_factors, "gain"_a = 1.0, py::kw_only(), "integrators"_a = 0,
                    "zeros_at_origin"_a = 0, "leads"_a = py::tuple(), "lags"_a = py::tuple(),
                    "lead_pairs"_a = py::tuple(), "lag_pairs"_a = py::tuple(), "dead_time"_a = 0.0,
                    "gain s^zeros_at_origin / s^integrators, times (T s + 1) for each T in leads, over the same for\n"
                    "lags, times exp(-dead_time s). Pairs are (time_constant, damping) of T^2 s^2 + 2 z T s + 1.")
        .def_static("from_polynomials", &from_polynomials, "numerator"_a, "denominator"_a, "dead_time"_a = 0.0,
                    "From polynomial coefficients in s, highest power first. Simple roots to about 1e-15 relative.")
        .def("__call__", [](const F& g, const py::object& s) { return evaluated(g, s); }, "s"_a,
             "Value at a complex s in rad/s: a complex number, or an array of the shape of s.")
        .def("__mul__", [](const F& a, const F& b) { return a * b; }, py::is_operator())
        .def("__eq__", [](const F& a, const F& b) { return a == b; }, py::is_operator())
        .def("__repr__", [](const F& g) { return "TransferFunction(" + g.text() + ", times in s)"; })
        .def("__str__", &F::text)
        .def_property_readonly("gain", &F::gain)
        .def_property_readonly("integrators", &F::integrators)
        .def_property_readonly("zeros_at_origin", &F::zeros_at_origin)
        .def_property_readonly("leads", [](const F& g) { return tuple_from(g.factors().leads); }, "s")
        .def_property_readonly("lags", [](const F& g) { return tuple_from(g.factors().lags); }, "s")
        .def_property_readonly("lead_pairs", [](const F& g) { return tuple_of_pairs(g.factors().lead_pairs); },
                               "(time_constant in s, damping) each")
        .def_property_readonly("lag_pairs", [](const F& g) { return tuple_of_pairs(g.factors().lag_pairs); },
                               "(time_constant in s, damping) each")
        .def_property_readonly("dead_time", &F::dead_time, "s")
        .def_property_readonly("poles", [](const F& g) { return roots(g.poles()); }, "rad/s, those at 0 first")
        .def_property_readonly("zeros", [](const F& g) { return roots(g.zeros()); }, "rad/s, those at 0 first")
        .def_property_readonly("unstable_poles", &F::unstable_poles, "poles with a real part above 0")
        .def_property_readonly("right_half_plane_zeros", &F::right_half_plane_zeros, "zeros with a real part above 0")
        .def_property_readonly("steady_gain", &F::steady_gain,
                               "limit at s = 0; infinite with the gain's sign for integrators, 0 for zeros there")
        .def_property_readonly("order", &F::order, "number of poles")
        .def_property_readonly("relative_degree", &F::relative_degree, "poles minus zeros; below 0 is improper")
        .def("inverse", &F::inverse, "1/G; refused where dead time would become prediction.")
        .def("with_dead_time", &F::with_dead_time, "dead_time"_a, "The same factors with another dead time in s.")
        .def("with_gain", &F::with_gain, "gain"_a, "The same factors with another gain.")
        .def("cancelled", &F::cancelled,
             "Without the factors that stand, equal to the last bit, above and below; those in the right half plane stay.");
}

}  // namespace

void bind_model(py::module_& m) {
    bind_class(m);
    m.def("first_order_plus_dead_time", &tw::first_order_plus_dead_time, "gain"_a, "lag"_a, "dead_time"_a,
          "gain exp(-dead_time s) / (lag s + 1), times in seconds.");
    m.def("second_order_plus_dead_time", &tw::second_order_plus_dead_time, "gain"_a, "lag_1"_a, "lag_2"_a, "dead_time"_a,
          "gain exp(-dead_time s) / ((lag_1 s + 1)(lag_2 s + 1)), times in seconds.");
    m.def("integrating_plus_dead_time", &tw::integrating_plus_dead_time, "slope"_a, "dead_time"_a, "lag"_a = 0.0,
          "slope exp(-dead_time s) / (s (lag s + 1)); slope per second, lag 0 means none.");
    m.def("oscillatory_plus_dead_time", &tw::oscillatory_plus_dead_time, "gain"_a, "time_constant"_a, "damping"_a,
          "dead_time"_a, "gain exp(-dead_time s) / (T^2 s^2 + 2 damping T s + 1), T = time_constant in seconds.");
    m.def("in_percent",
          [](const TransferFunction& G, const py::object& process_value_range, const py::object& output_range) {
              return tw::in_percent(G, needed_range_from("process_value_range", process_value_range),
                                    needed_range_from("output_range", output_range));
          },
          "G"_a, py::kw_only(), "process_value_range"_a, "output_range"_a,
          "The same process with process value and output in percent of span.");
    m.def("step_response",
          [](const TransferFunction& G, const py::object& time_s) {
              const auto t = numbers_from("time_s", time_s);
              std::vector<double> y;
              {
                  const py::gil_scoped_release released;
                  y = tw::step_response(G, t);
              }
              return array_from(y);
          },
          "G"_a, "time_s"_a, "Response to a unit step of the output at time 0, at each time in seconds; exact.");
}

}  // namespace binding
