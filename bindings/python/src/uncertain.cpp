// Uncertain processes: the worst of them, and the share that violates limits.
#include "bind.hpp"

namespace binding {

namespace {

using tw::Uncertainty;
using tw::ViolatingShare;
using tw::WorstCase;

// The caller's progress, and a look for Ctrl-C even without one. Called without the interpreter's lock.
tw::Progress progress_from(const py::object& progress) {
    return [&progress](double share_done) {
        const py::gil_scoped_acquire locked;
        if (PyErr_CheckSignals() != 0) throw py::error_already_set();
        if (progress.is_none()) return true;
        const py::object answer = progress(share_done);
        return answer.is_none() || py::cast<bool>(answer);
    };
}

std::string text_of(const Uncertainty& u) {
    const std::string head = std::string("Uncertainty.");
    if (u.kind() == tw::UncertaintyKind::models)
        return head + "of_models(" + std::to_string(u.models().size()) + " models)";
    if (u.kind() == tw::UncertaintyKind::confidence_region) {
        std::string names;
        for (const auto& name : u.parameter_names()) names += (names.empty() ? "" : ", ") + name;
        return Line(head + "from_fit").add("confidence", u.confidence()).add("parameters", names).done();
    }
    const auto& b = u.half_widths();
    const std::string s = b.absolute ? "s" : "";
    Line line(head + "box");
    line.unless(0.0, "gain", b.gain).unless(0.0, "lags", b.lags, s).unless(0.0, "leads", b.leads, s)
        .unless(0.0, "damping", b.damping).unless(0.0, "dead_time", b.dead_time, s);
    if (b.absolute) line.add("absolute", "True");
    return line.done();
}

py::array_t<double> half_axes_of(const Uncertainty& u) {
    const auto n = static_cast<py::ssize_t>(u.estimates().size());
    return array_from(u.half_axes()).reshape({n, n});
}

void bind_uncertainty(py::module_& m) {
    py::class_<Uncertainty>(m, "Uncertainty", "A set of processes: made by box, from_fit or of_models. Immutable.")
        .def_static("box",
                    [](double gain, double lags, double leads, double damping, double dead_time, bool absolute) {
                        return Uncertainty::box({.gain = gain, .lags = lags, .leads = leads, .damping = damping,
                                                 .dead_time = dead_time, .absolute = absolute});
                    },
                    py::kw_only(), "gain"_a = 0.0, "lags"_a = 0.0, "leads"_a = 0.0, "damping"_a = 0.0, "dead_time"_a = 0.0,
                    "absolute"_a = false,
                    "Every parameter within its own limits, each lag on its own. Half widths: relative (0.3 is from 0.7 to 1.3\n"
                    "of the parameter), or absolute in its unit. gain is the slope of an integrating process.")
        .def_static("from_fit", &Uncertainty::from_fit, "fit"_a, py::kw_only(), "confidence"_a = 0.95,
                    "The joint confidence region of the fit's gain (or slope), lag and dead time.")
        .def_static("of_models", &Uncertainty::of_models, "models"_a, "Operating points, one TransferFunction each.")
        .def_property_readonly("kind", [](const Uncertainty& u) { return tw::name_of(u.kind()); },
                               "'box', 'confidence_region' or 'models'")
        .def_property_readonly("confidence",
                               [](const Uncertainty& u) {
                                   return u.kind() == tw::UncertaintyKind::confidence_region ? std::optional(u.confidence())
                                                                                             : std::nullopt;
                               },
                               "of a region; else None")
        .def_property_readonly("models", [](const Uncertainty& u) { return py::tuple(py::cast(u.models())); },
                               "of a list; of a region, its center; of a box, none")
        .def_property_readonly("parameter_names", [](const Uncertainty& u) { return py::tuple(py::cast(u.parameter_names())); },
                               "of a region: those of gain (or slope), lag_1, dead_time that were fitted")
        .def_property_readonly("estimates", [](const Uncertainty& u) { return array_from(u.estimates()); }, "of a region, one a name")
        .def_property_readonly("half_axes", &half_axes_of,
                               "of a region: it is estimates + half_axes @ (ball of radius 1), a lower triangle")
        .def("__repr__", [](const Uncertainty& u) { return text_of(u); });
}

std::string reached(const std::optional<double>& value, const std::optional<double>& bound) {
    return optional_text(value) + (bound && value && *bound != *value ? " (bound " + short_text(*bound) + ")" : "");
}

void bind_worst_case(py::module_& m) {
    py::class_<KnownWorstCase>(m, "WorstCase",
                          "The worst over all members of a set of processes. Of each figure the worst one reached by a member that was\n"
                          "analyzed, and the bound that no member exceeds. None unless every member is proved stable, or none was\n"
                          "found that is not and the proof was cut short.")
        .def_property_readonly("verdict", [](const KnownWorstCase& w) { return tw::name_of(w.verdict); },
                               "'stable': proved of all members; 'unstable' or 'marginal': the member `at` is; 'undetermined'")
        .def_readonly("max_sensitivity", &WorstCase::max_sensitivity, "Ms, reached")
        .def_readonly("max_sensitivity_bound", &WorstCase::max_sensitivity_bound, "proved upper bound")
        .def_readonly("gain_margin", &WorstCase::gain_margin, "factor above 1; infinite for none")
        .def_readonly("gain_margin_bound", &WorstCase::gain_margin_bound, "proved lower bound")
        .def_readonly("phase_margin_deg", &WorstCase::phase_margin_deg, "infinite for none")
        .def_readonly("phase_margin_deg_bound", &WorstCase::phase_margin_deg_bound, "proved lower bound")
        .def_readonly("delay_margin", &WorstCase::delay_margin, "s; infinite for none")
        .def_readonly("delay_margin_bound", &WorstCase::delay_margin_bound, "s, proved lower bound")
        .def_readonly("at", &WorstCase::at, "TransferFunction: the member with the largest Ms found, or one that is not stable")
        .def_readonly("at_model", &WorstCase::at_model, "its index in a list of models; else None")
        .def_readonly("certified", &WorstCase::certified, "verdict proved, and each bound within the tolerance of what was reached")
        .def_readonly("cancelled", &WorstCase::cancelled, "by progress")
        .def_readonly("members_tried", &WorstCase::members_tried)
        .def_readonly("boxes_used", &WorstCase::boxes_used, "of the proof")
        .def_readonly("process", &KnownWorstCase::process, "the nominal one, as it was given")
        .def_readonly("settings", &KnownWorstCase::settings)
        .def_readonly("extra_delay", &KnownWorstCase::extra_delay, "s")
        .def("plot", [](const py::object& worst) { return py::module_::import("tauwright.plot").attr("worst_case_figure")(worst); },
             "A Matplotlib Figure of the nominal and the worst open loop on the complex plane.")
        .def("__repr__", [](const KnownWorstCase& w) {
            return Line("WorstCase")
                .add("verdict", tw::name_of(w.verdict))
                .add("max_sensitivity", reached(w.max_sensitivity, w.max_sensitivity_bound))
                .add("gain_margin", reached(w.gain_margin, w.gain_margin_bound))
                .add("phase_margin", reached(w.phase_margin_deg, w.phase_margin_deg_bound), "deg")
                .add("delay_margin", reached(w.delay_margin, w.delay_margin_bound), "s")
                .add("certified", w.certified ? "True" : "False")
                .add("at", w.at.text())
                .done();
        });
    const tw::WorstCaseOptions usual;
    m.def("worst_case",
          [](const tw::TransferFunction& G, const tw::PidSettings& settings, const Uncertainty& uncertainty, double extra_delay,
             double tolerance, std::size_t most_boxes, const py::object& progress) {
              const tw::WorstCaseOptions options{.extra_delay = extra_delay, .tolerance = tolerance, .most_boxes = most_boxes,
                                                 .progress = progress_from(progress)};
              const py::gil_scoped_release released;
              return KnownWorstCase{tw::worst_case(G, settings, uncertainty, options), G, settings, extra_delay};
          },
          "G"_a, "settings"_a, "uncertainty"_a, py::kw_only(), "extra_delay"_a = usual.extra_delay, "tolerance"_a = usual.tolerance,
          "most_boxes"_a = usual.most_boxes, "progress"_a = py::none(),
          "The worst margins over every member of the set about G, with a proof.\n\n"
          "tolerance: relative gap to which the proof closes; most_boxes: of the proof, then certified is False\n"
          "progress: called with the share done, 0 to 1; returning False ends it with what was reached");
}

void bind_share(py::module_& m) {
    py::class_<ViolatingShare>(m, "ViolatingShare", "The share of drawn members that violate a limit or are not stable.")
        .def_readonly("share", &ViolatingShare::share)
        .def_readonly("standard_error", &ViolatingShare::standard_error, "of the share; 0 for a list of models")
        .def_readonly("members", &ViolatingShare::members, "drawn; of a list, its length")
        .def_readonly("unstable", &ViolatingShare::unstable, "of them not stable, or not decided")
        .def_readonly("cancelled", &ViolatingShare::cancelled, "by progress; the rest counts those drawn before")
        .def("__repr__", [](const ViolatingShare& s) {
            return Line("ViolatingShare").add("share", short_text(s.share)).add("standard_error", short_text(s.standard_error))
                .add("members", std::to_string(s.members)).add("unstable", std::to_string(s.unstable)).done();
        });
    m.def("violating_share",
          [](const tw::TransferFunction& G, const tw::PidSettings& settings, const Uncertainty& uncertainty,
             std::optional<double> max_sensitivity, std::optional<double> gain_margin, std::optional<double> phase_margin_deg,
             std::size_t members, std::uint64_t seed, double extra_delay, const py::object& progress) {
              const tw::ViolationLimits limits{.max_sensitivity = max_sensitivity, .gain_margin = gain_margin,
                                               .phase_margin_deg = phase_margin_deg};
              const tw::Progress callback = progress_from(progress);
              const py::gil_scoped_release released;
              return tw::violating_share(G, settings, uncertainty, limits, members, seed, extra_delay, callback);
          },
          "G"_a, "settings"_a, "uncertainty"_a, py::kw_only(), "max_sensitivity"_a = py::none(), "gain_margin"_a = py::none(),
          "phase_margin_deg"_a = py::none(), "members"_a = 1000, "seed"_a = 1, "extra_delay"_a = 0.0, "progress"_a = py::none(),
          "Draws members evenly over the set (a list of models is taken whole) and counts those above max_sensitivity,\n"
          "below gain_margin or phase_margin_deg, or not stable. Equal seeds give equal members.");
}

}  // namespace

void bind_uncertain(py::module_& m) {
    bind_uncertainty(m);
    bind_worst_case(m);
    bind_share(m);
}

}  // namespace binding
