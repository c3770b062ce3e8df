#include "bind.hpp"

namespace binding {

namespace {

using tw::DesiredResponse;
using tw::Obstacle;
using tw::Synthesis;

DesiredResponse response_of(std::optional<double> time_constant, int order, std::optional<tw::TransferFunction> transfer_function) {
    // What synthesize would say later, said where the arguments are written.
    if (transfer_function && (time_constant || order != 1))
        throw tw::Error(tw::error_code::conflicting_arguments, std::string("transfer_function is given together with ") +
                                                                   (time_constant ? "time_constant" : "order") +
                                                                   "; give one or the other");
    if (!transfer_function && !time_constant)
        throw tw::Error(tw::error_code::missing_argument, "neither time_constant nor transfer_function is given; give one");
    if (time_constant && !tw::is_finite(*time_constant))
        throw tw::Error(tw::error_code::not_finite, "time_constant is " + tw::text_of(*time_constant) + "; give a finite number");
    if (time_constant && !(*time_constant > 0.0))
        throw tw::Error(tw::error_code::out_of_domain,
                        "time_constant is " + tw::text_of(*time_constant) + "; give a number above 0");
    if (order < 1 || order > 20)
        throw tw::Error(tw::error_code::out_of_domain, "order is " + std::to_string(order) + "; give an order from 1 to 20");
    return {.time_constant = time_constant, .order = order, .transfer_function = std::move(transfer_function)};
}

}  // namespace

void bind_synthesize(py::module_& m) {
    py::class_<DesiredResponse>(m, "DesiredResponse",
                                "The closed loop asked for: a time_constant in seconds (with order), from which the default response\n"
                                "of the process follows, or a transfer_function taken at its word. Immutable.")
        .def(py::init(&response_of), "time_constant"_a = py::none(), py::kw_only(), "order"_a = 1,
             "transfer_function"_a = py::none())
        .def_readonly("time_constant", &DesiredResponse::time_constant, "s, or None")
        .def_readonly("order", &DesiredResponse::order)
        .def_readonly("transfer_function", &DesiredResponse::transfer_function, "TransferFunction, or None")
        .def("__repr__", [](const DesiredResponse& d) {
            Line line("DesiredResponse");
            line.add("time_constant", d.time_constant, "s");
            if (d.order != 1) line.add("order", std::to_string(d.order));
            if (d.transfer_function) line.add("transfer_function", d.transfer_function->text(), "(times in s)");
            return line.done();
        });

    py::class_<Obstacle>(m, "Obstacle", "One thing that stands in the way of the controller asked for, or that it brings with it.")
        .def_property_readonly("code", [](const Obstacle& o) { return tw::name_of(o.code); })
        .def_property_readonly("severity", [](const Obstacle& o) { return tw::name_of(o.severity); },
                               "'caution', 'needs_filter' or 'impossible'")
        .def_readonly("message", &Obstacle::message, "what and why")
        .def_readonly("value", &Obstacle::value, "the number that shows it")
        .def_readonly("repair", &Obstacle::repair, "what to ask for instead")
        .def("__repr__", [](const Obstacle& o) {
            return std::string("Obstacle(") + tw::name_of(o.code) + ", severity=" + tw::name_of(o.severity) + ": " + o.message + ")";
        });

    py::class_<Synthesis>(m, "Synthesis", "The answer of synthesize. What cannot be built is said in obstacles.")
        .def_readonly("process", &Synthesis::process)
        .def_readonly("attained", &Synthesis::attained, "T: what the exact controller gives")
        .def_readonly("controller", &Synthesis::controller, "(1/G) T/(1 - T), exact and callable at s; None where impossible")
        .def_property_readonly("obstacles", [](const Synthesis& s) { return py::tuple(py::cast(s.obstacles)); })
        .def_readonly("buildable", &Synthesis::buildable, "no obstacle is impossible")
        .def_readonly("settings", &Synthesis::settings, "the P, I, PI or PID settings; None where there are none")
        .def_readonly("pid_expressible", &Synthesis::pid_expressible,
                      "the settings are that controller without loss, but for the dead time")
        .def("attained_with_settings",
             [](const Synthesis& synthesis, const py::object& s) {
                 if (!synthesis.settings) synthesis.attained_with_settings(0.0);  // throws by name, also for an empty array
                 return evaluated([&](Complex x) { return synthesis.attained_with_settings(x); }, s);
             },
             "s"_a, "Closed loop with the settings instead of the exact controller, at a number or an array.")
        .def("__repr__", [](const Synthesis& s) {
            Line line("Synthesis");
            line.add("buildable", s.buildable ? "True" : "False").add("attained", s.attained.text(), "(times in s)");
            if (s.settings) line.add("settings", std::string(py::repr(py::cast(*s.settings))));
            std::string codes;
            for (const Obstacle& o : s.obstacles) codes += (codes.empty() ? "" : " ") + std::string(tw::name_of(o.code));
            return line.add("obstacles", codes.empty() ? "none" : codes).done();
        });

    m.def("synthesize", &tw::synthesize, "G"_a, "desired"_a, py::call_guard<py::gil_scoped_release>(),
          "Solves the loop for the controller that gives the response asked for, and the nearest P, PI or PID.");
}

}  // namespace binding
