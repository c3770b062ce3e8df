#include "bind.hpp"
#include "identify_options.hpp"

namespace binding {

namespace {

using tw::SheetController;
using tw::TuningRequest;
using tw::TuningSheet;

// A member of the as-found or the proposed controller, None where there is no such controller.
template <auto side>
std::optional<KnownWorstCase> worst_case_of(const tw::TuningSheet& sheet) {
    const auto& controller = sheet.*side;
    if (!controller || !controller->worst_case) return std::nullopt;
    return KnownWorstCase{*controller->worst_case, *sheet.model, controller->settings, 0.5 * sheet.duty.scan_time.value_or(0.0)};
}

template <auto controller, auto member>
py::object of(const TuningSheet& sheet) {
    const std::optional<SheetController>& c = sheet.*controller;
    if (!c) return py::none();
    return py::cast((*c).*member);
}

std::string text_of(const TuningSheet& sheet) {
    Line line("TuningSheet");
    if (!sheet.loop_name.empty()) line.add("loop_name", sheet.loop_name);
    line.add("advice", tw::name_of(sheet.advice()));
    if (sheet.proposed) line.add("settings", std::string(py::repr(py::cast(sheet.proposed->settings))));
    else line.add("settings", "withheld");
    return line.done();
}

void bind_request(py::module_& m) {
    py::class_<TuningRequest>(m, "TuningRequest",
                              "What to tune for; everything is optional. Immutable.\n\n"
                              "time_constant: closed-loop time constant in s; None: chosen from the model\n"
                              "form: the ControllerForm at hand; as_found: the Entered settings in service, in that form\n"
                              "duty: scan time and steps for the trends; steps, noise and limits in percent\n"
                              "safety_function: refused where True\n"
                              "accept_weak_margins_by: who accepts settings with weak margins\n"
                              "identify: a dictionary with the keys form, drift, fixed, as of identify()")
        .def(py::init([](std::optional<double> time_constant, const std::optional<tw::ControllerForm>& form,
                         const std::optional<tw::Duty>& duty, const std::optional<tw::Entered>& as_found, bool safety_function,
                         std::optional<std::string> accept_weak_margins_by, std::string loop_name, const py::object& identify) {
                 return TuningRequest{.time_constant = time_constant,
                                      .form = form,
                                      .duty = duty,
                                      .as_found = as_found,
                                      .safety_function = safety_function,
                                      .accept_weak_margins_by = accept_weak_margins_by.value_or(""),
                                      .loop_name = std::move(loop_name),
                                      .identify = identify_options_from(identify)};
             }),
             "time_constant"_a = py::none(), py::kw_only(), "form"_a = py::none(), "duty"_a = py::none(),
             "as_found"_a = py::none(), "safety_function"_a = false, "accept_weak_margins_by"_a = py::none(),
             "loop_name"_a = "", "identify"_a = py::none())
        .def_readonly("time_constant", &TuningRequest::time_constant, "s, or None")
        .def_readonly("form", &TuningRequest::form)
        .def_readonly("duty", &TuningRequest::duty)
        .def_readonly("as_found", &TuningRequest::as_found)
        .def_readonly("safety_function", &TuningRequest::safety_function)
        .def_property_readonly("accept_weak_margins_by",
                               [](const TuningRequest& r) -> std::optional<std::string> {
                                   if (r.accept_weak_margins_by.empty()) return std::nullopt;
                                   return r.accept_weak_margins_by;
                               })
        .def_readonly("loop_name", &TuningRequest::loop_name)
        .def("__repr__", [](const TuningRequest& r) {
            Line line("TuningRequest");
            if (!r.loop_name.empty()) line.add("loop_name", r.loop_name);
            line.add("time_constant", r.time_constant, "s");
            if (r.form) line.add("form", std::string(py::repr(py::cast(*r.form))));
            if (r.duty) line.add("duty", std::string(py::repr(py::cast(*r.duty))));
            if (r.as_found) line.add("as_found", std::string(py::repr(py::cast(*r.as_found))));
            return shown(line.done());
        });
}

void bind_sheet(py::module_& m) {
    using S = TuningSheet;
    using C = SheetController;
    py::class_<tw::SpeedChoice>(m, "SpeedChoice", "How fast the loop was asked to be, and why. Times in seconds.")
        .def_readonly("time_constant", &tw::SpeedChoice::time_constant, "s")
        .def_readonly("reason", &tw::SpeedChoice::reason)
        .def_readonly("effective_dead_time", &tw::SpeedChoice::effective_dead_time,
                      "s: dead time + half a scan + measurement filter")
        .def_readonly("half_scan", &tw::SpeedChoice::half_scan, "s")
        .def_readonly("integral_time_limited", &tw::SpeedChoice::integral_time_limited,
                      "to 4 (time_constant + effective_dead_time), so that loads do not drag")
        .def_readonly("measurement_filter_time", &tw::SpeedChoice::measurement_filter_time, "s")
        .def("__repr__", [](const tw::SpeedChoice& s) {
            return Line("SpeedChoice").add("time_constant", short_text(s.time_constant), "s").add("reason", s.reason)
                .add("effective_dead_time", short_text(s.effective_dead_time), "s").done();
        });
    py::class_<S>(m, "TuningSheet", "The record of a tuning: what was seen, what was decided, what to key in, how to go back.")
        .def("text", [](const S& s) { return shown(s.text()); }, "Plain text of 78 columns.")
        .def("json", &S::json, py::call_guard<py::gil_scoped_release>(), "JSON, schema tauwright-tuning-sheet; from_json reads it back.")
        .def_static("from_json", [](std::string_view json) { return S::from_json(json); }, "json"_a, py::call_guard<py::gil_scoped_release>(), "Reads what json() wrote.")
        .def_readonly("library_version", &S::library_version)
        .def_readonly("loop_name", &S::loop_name)
        .def_property_readonly("source", [](const S& s) { return shown(s.source); }, "the record's file, or '' for arrays")
        .def_property_readonly("first_stamp", [](const S& s) { return shown(s.first_stamp); }, "of the record, as written")
        .def_readonly("input_sha256", &S::input_sha256)
        .def_readonly("process_value_range", &S::process_value_range)
        .def_readonly("output_range", &S::output_range)
        .def_readonly("gain_unit", &S::gain_unit, "of gains in settings")
        .def_readonly("fit", &S::fit, "the FittedModel, in the record's units")
        .def_readonly("model", &S::model, "the process in the sheet's gain unit, or None")
        .def_readonly("speed", &S::speed, "SpeedChoice, or None where nothing was fitted")
        .def_property_readonly("obstacles", [](const S& s) { return py::tuple(py::cast(s.obstacles)); })
        .def_readonly("duty", &S::duty)
        .def_readonly("form", &S::form)
        .def_property_readonly("settings", &of<&S::proposed, &C::settings>, "PidSettings proposed, or None when withheld")
        .def_property_readonly("entered", &of<&S::proposed, &C::entered>, "the numbers to key in, or None")
        .def_property_readonly("margins", &of<&S::proposed, &C::margins>, "Robustness of the numbers proposed, or None")
        .def_property_readonly("figures", &of<&S::proposed, &C::figures>, "Figures of their trend, or None")
        .def_property_readonly("worst_case", &worst_case_of<&S::proposed>,
                               "WorstCase over the fit's joint 95 % confidence region, or None")
        .def_property_readonly("valve_cycle", &of<&S::proposed, &C::valve_cycle>,
                               "ValveCycle: what the duty's valve makes of the loop; None for a perfect one, or when withheld")
        .def_property_readonly("as_found_settings", &of<&S::as_found, &C::settings>)
        .def_property_readonly("as_found_entered", &of<&S::as_found, &C::entered>, "the roll-back values")
        .def_property_readonly("as_found_margins", &of<&S::as_found, &C::margins>)
        .def_property_readonly("as_found_figures", &of<&S::as_found, &C::figures>)
        .def_property_readonly("as_found_worst_case", &worst_case_of<&S::as_found>)
        .def_property_readonly("as_found_valve_cycle", &of<&S::as_found, &C::valve_cycle>)
        .def_property_readonly("findings", [](const S& s) { return py::tuple(py::cast(s.findings())); })
        .def_property_readonly("advice", [](const S& s) { return tw::name_of(s.advice()); })
        .def_property_readonly("withheld", [](const S& s) { return py::tuple(py::cast(s.withheld)); },
                               "why no settings are given; empty where they are")
        .def_readonly("weak_margins_accepted_by", &S::weak_margins_accepted_by)
        .def_property_readonly("cautions", [](const S& s) { return py::tuple(py::cast(s.cautions)); })
        .def_property_readonly("trend_horizon", [](const S& s) { return tw::trend_horizon(s); },
                               "s, how long the trends behind the figures run")
        .def("__repr__", [](const S& s) { return text_of(s); });

    py::class_<tw::SheetDifference>(m, "SheetDifference", "A JSON pointer and both values as JSON text ('' for absent).")
        .def_readonly("path", &tw::SheetDifference::path)
        .def_readonly("earlier", &tw::SheetDifference::earlier)
        .def_readonly("later", &tw::SheetDifference::later)
        .def("__repr__", [](const tw::SheetDifference& d) {
            return "SheetDifference(" + d.path + ": " + d.earlier + " -> " + d.later + ")";
        });
}

}  // namespace

void bind_tune(py::module_& m) {
    bind_request(m);
    bind_sheet(m);
    m.def("tune",
          [](const tw::Record& record, const TuningRequest* request) {
              const py::gil_scoped_release released;
              return tw::tune(record, request == nullptr ? TuningRequest{} : *request);
          },
          "record"_a, "request"_a = py::none(),
          "Record in, TuningSheet out. Settings are withheld, with the reasons, where the record or the margins advise it.");
    m.def("differences",
          [](const TuningSheet& earlier, const TuningSheet& later) {
              std::vector<tw::SheetDifference> found;
              {
                  const py::gil_scoped_release released;
                  found = tw::differences(earlier, later);
              }
              return py::tuple(py::cast(found));
          },
          "earlier"_a, "later"_a, "Everything that differs between two sheets, in the order of the document.");
}

}  // namespace binding
