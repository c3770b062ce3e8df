#include "bind.hpp"

namespace binding {

namespace {

using tw::Between;
using tw::DiscreteTransferFunction;

constexpr std::array<Word<Between>, 2> between_words = {{{"constant", Between::constant}, {"linear", Between::linear}}};

void bind_coefficients(py::module_& m) {
    using C = tw::run::PidCoefficients;
    py::class_<C>(m, "PidCoefficients", "Coefficients of one scan of a PidBlock. Plain data: equal bits give equal outputs.")
        .def_readonly("gain", &C::gain)
        .def_readonly("setpoint_weight", &C::setpoint_weight)
        .def_readonly("integral_per_scan", &C::integral_per_scan)
        .def_readonly("derivative_per_scan", &C::derivative_per_scan)
        .def_readonly("derivative_smoothing", &C::derivative_smoothing)
        .def_readonly("measurement_smoothing", &C::measurement_smoothing)
        .def_readonly("tracking_per_scan", &C::tracking_per_scan,
                      "share of the excess over a limit that the integral gives up per scan")
        .def_readonly("output_change_per_scan", &C::output_change_per_scan,
                      "farthest the output goes in one scan in automatic; infinite for no limit")
        .def("__eq__", [](const C& a, const C& b) { return a == b; }, py::is_operator())
        .def("__repr__", [](const C& c) {
            Line line("PidCoefficients");
            line.add("gain", c.gain)
                .add("setpoint_weight", c.setpoint_weight)
                .add("integral_per_scan", short_text(c.integral_per_scan))
                .add("derivative_per_scan", short_text(c.derivative_per_scan))
                .add("derivative_smoothing", short_text(c.derivative_smoothing))
                .add("measurement_smoothing", short_text(c.measurement_smoothing))
                .add("tracking_per_scan", short_text(c.tracking_per_scan));
            if (tw::is_finite(c.output_change_per_scan)) line.add("output_change_per_scan", short_text(c.output_change_per_scan));
            return line.done();
        });
    m.def("discretize", [](const tw::PidSettings& settings, double scan_time) { return tw::discretize(settings, scan_time); },
          "settings"_a, py::kw_only(), "scan_time"_a, "Settings to the coefficients of one scan, by backward differences.");
}

// "a - b" or "a + |b|", nothing where b is 0.
std::string plus(double b) {
    if (b == 0.0) return "";
    return (b < 0.0 ? " - " : " + ") + short_text(b < 0.0 ? -b : b);
}

// The factors z - (1 + offset), conjugates as one factor of second degree.
std::vector<std::string> factors_of(const std::vector<Complex>& offsets) {
    std::vector<std::string> factors;
    for (std::size_t i = 0; i < offsets.size(); ++i) {
        const Complex root = 1.0 + offsets[i];
        if (root == 0.0) {
            factors.insert(factors.begin(), "z");
        } else if (root.imag() == 0.0) {
            factors.push_back("(z" + plus(-root.real()) + ")");
        } else {
            const double middle = -2.0 * root.real();
            factors.push_back("(z^2" + (middle == 0.0 ? "" : plus(middle) + " z") + plus(std::norm(root)) + ")");
            ++i;  // its conjugate stands beside it
        }
    }
    return factors;
}

std::string text_of(const DiscreteTransferFunction& h) {
    std::string text = short_text(h.leading());
    for (const auto& zero : factors_of(h.zero_offsets())) text += " " + zero;
    if (h.delay_scans() != 0) text += " z^-" + std::to_string(h.delay_scans());
    const auto poles = factors_of(h.pole_offsets());
    if (poles.empty()) return text;
    std::string below;
    for (const auto& pole : poles) below += pole;
    return text + " / " + (poles.size() == 1 ? below : "(" + below + ")");
}

py::array_t<Complex> complexes(const std::vector<Complex>& values, double shift) {
    py::array_t<Complex> array(static_cast<py::ssize_t>(values.size()));
    for (std::size_t i = 0; i < values.size(); ++i) array.mutable_at(static_cast<py::ssize_t>(i)) = shift + values[i];
    return array;
}

void bind_held(py::module_& m) {
    using H = DiscreteTransferFunction;
    py::class_<H>(m, "DiscreteTransferFunction",
                  "H(z), the exact pulse response of a held process from one sample to the next; made by held. With d = delay_scans:\n\n"
                  "x[k+1] = x[k] + growth @ x[k] + ahead u[k+1-d] + now u[k-d] + before u[k-1-d]\n"
                  "y[k] = outputs @ x[k] + direct_now u[k-d] + direct_before u[k-1-d]\n\n"
                  "H(z) = leading z**-d prod(z - zeros) / prod(z - poles). Immutable.")
        .def("__call__",
             [](const H& h, const py::object& z) { return evaluated([&](Complex at) { return h(at); }, z, "z"); }, "z"_a,
             "Value at a complex z: a complex number, or an array of the shape of z.")
        .def("at_frequency",
             [](const H& h, const py::object& rad_s) {
                 return evaluated_at_reals([&](double w) { return h.at_frequency(w); }, rad_s, "rad_s");
             },
             "rad_s"_a, "Value at z = exp(j rad_s scan_time), with z - 1 formed without cancellation; shape of rad_s.")
        .def_property_readonly("scan_time", &H::scan_time, "s")
        .def_property_readonly("between", [](const H& h) { return word_of(between_words, h.between()); }, "'constant' or 'linear'")
        .def_property_readonly("order", &H::order, "number of states")
        .def_property_readonly("delay_scans", &H::delay_scans, "whole scans of dead time")
        .def_property_readonly("steady_gain", &H::steady_gain, "H(1); infinite with the gain's sign for an integrating process")
        .def_property_readonly("leading", &H::leading)
        .def_property_readonly("poles", [](const H& h) { return complexes(h.pole_offsets(), 1.0); })
        .def_property_readonly("zeros", [](const H& h) { return complexes(h.zero_offsets(), 1.0); })
        .def_property_readonly("pole_offsets", [](const H& h) { return complexes(h.pole_offsets(), 0.0); },
                               "poles - 1, to their last digits also near z = 1")
        .def_property_readonly("zero_offsets", [](const H& h) { return complexes(h.zero_offsets(), 0.0); }, "zeros - 1")
        .def_property_readonly("growth",
                               [](const H& h) {
                                   const auto n = static_cast<py::ssize_t>(h.order());
                                   return array_from(h.growth()).reshape({n, n});
                               },
                               "exp(A scan_time) - identity")
        .def_property_readonly("now", [](const H& h) { return array_from(h.now()); })
        .def_property_readonly("before", [](const H& h) { return array_from(h.before()); })
        .def_property_readonly("ahead", [](const H& h) { return array_from(h.ahead()); })
        .def_property_readonly("outputs", [](const H& h) { return array_from(h.outputs()); })
        .def_property_readonly("direct_now", &H::direct_now)
        .def_property_readonly("direct_before", &H::direct_before)
        .def_property_readonly("factored_error", &H::factored_error, "relative error of the factored form away from its roots")
        .def("__repr__", [](const H& h) {
            return "DiscreteTransferFunction(" + text_of(h) + ", scan_time=" + tw::text_of(h.scan_time()) + " s" +
                   (h.between() == Between::linear ? ", between=linear)" : ")");
        });
    m.def("held",
          [](const tw::TransferFunction& G, double scan_time, std::string_view between) {
              const Between what = value_of(between_words, "between", between);
              const py::gil_scoped_release released;
              return tw::held(G, scan_time, what);
          },
          "G"_a, "scan_time"_a, py::kw_only(), "between"_a = "constant",
          "The process as a computer sees it that samples every scan_time seconds: input held 'constant', or 'linear'\n"
          "from each value to the next. Any proper process of order up to 20, any dead time, exact.");
}

}  // namespace

void bind_discretize(py::module_& m) {
    bind_coefficients(m);
    bind_held(m);
}

}  // namespace binding
