#include "bind.hpp"

namespace binding {

void bind_discretize(py::module_& m) {
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
        .def("__eq__", [](const C& a, const C& b) { return a == b; }, py::is_operator())
        .def("__repr__", [](const C& c) {
            return Line("PidCoefficients")
                .add("gain", c.gain)
                .add("setpoint_weight", c.setpoint_weight)
                .add("integral_per_scan", short_text(c.integral_per_scan))
                .add("derivative_per_scan", short_text(c.derivative_per_scan))
                .add("derivative_smoothing", short_text(c.derivative_smoothing))
                .add("measurement_smoothing", short_text(c.measurement_smoothing))
                .add("tracking_per_scan", short_text(c.tracking_per_scan))
                .done();
        });
    m.def("discretize", [](const tw::PidSettings& settings, double scan_time) { return tw::discretize(settings, scan_time); },
          "settings"_a, py::kw_only(), "scan_time"_a, "Settings to the coefficients of one scan, by backward differences.");
}

}  // namespace binding
