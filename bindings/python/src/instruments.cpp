// Valve and transmitter: their settings, and the blocks that run once per scan.
#include "bind.hpp"

namespace binding {

std::string text_of(const tw::ValveSettings& v) {
    return Line("ValveSettings").unless(0.0, "dead_band", v.dead_band).unless(0.0, "stick", v.stick)
        .unless(0.0, "resolution", v.resolution).add("travel_rate", v.travel_rate_per_s, "per s").done();
}

std::string text_of(const tw::TransmitterSettings& t) {
    return Line("TransmitterSettings").unless(0.0, "lag", t.lag, "s").unless(0.0, "resolution", t.resolution).done();
}

namespace {

namespace run = tw::run;
using tw::TransmitterSettings;
using tw::ValveSettings;

class Valve {
public:
    Valve(const ValveSettings& settings, double scan_time, double position_low, double position_high,
          std::optional<double> initial_position)
        : settings_(settings), block_(tw::discretize(settings, scan_time, position_low, position_high), position_low) {
        if (!initial_position) return;
        if (!tw::is_finite(*initial_position))
            throw tw::Error(tw::error_code::not_finite,
                            "initial_position is " + tw::text_of(*initial_position) + "; give a finite number");
        block_.start(*initial_position);
    }
    double step(double demand) noexcept { return block_.step(demand); }
    double position() const noexcept { return block_.position(); }
    const ValveSettings& settings() const noexcept { return settings_; }
    const run::ValveCoefficients& coefficients() const noexcept { return block_.coefficients(); }

private:
    ValveSettings settings_;
    run::Valve block_;
};

// Without an initial value it rests at the first value it is given.
class Transmitter {
public:
    Transmitter(const TransmitterSettings& settings, double scan_time, double noise, std::uint64_t seed,
                std::optional<double> initial_value)
        : settings_(settings), coefficients_(tw::discretize(settings, scan_time, noise, seed)) {
        if (!initial_value) return;
        if (!tw::is_finite(*initial_value))
            throw tw::Error(tw::error_code::not_finite,
                            "initial_value is " + tw::text_of(*initial_value) + "; give a finite number");
        block_ = run::Transmitter(coefficients_, *initial_value);
    }
    double step(double process_value) noexcept {
        if (!block_ && tw::is_finite(process_value)) block_ = run::Transmitter(coefficients_, process_value);
        return block_ ? block_->step(process_value) : process_value;
    }
    std::optional<double> measured() const noexcept { return block_ ? std::optional(block_->measured()) : std::nullopt; }
    const TransmitterSettings& settings() const noexcept { return settings_; }
    const run::TransmitterCoefficients& coefficients() const noexcept { return coefficients_; }

private:
    TransmitterSettings settings_;
    run::TransmitterCoefficients coefficients_;
    std::optional<run::Transmitter> block_;
};

void bind_settings(py::module_& m) {
    py::class_<ValveSettings>(m, "ValveSettings",
                              "What a control valve does to its demand, percent of travel unless said otherwise. Immutable.\n\n"
                              "dead_band: full width, what a reversal loses\n"
                              "stick: at rest it holds until the demand is farther away than this, then jumps to it\n"
                              "resolution: it moves in whole multiples of this\n"
                              "travel_rate_per_s: fastest travel; None: at once. 5 is a stroke of 20 s")
        .def(py::init([](double dead_band, double stick, double resolution, std::optional<double> travel_rate_per_s) {
                 const ValveSettings valve{.dead_band = dead_band, .stick = stick, .resolution = resolution,
                                           .travel_rate_per_s = travel_rate_per_s};
                 tw::check(valve);
                 return valve;
             }),
             py::kw_only(), "dead_band"_a = 0.0, "stick"_a = 0.0, "resolution"_a = 0.0, "travel_rate_per_s"_a = py::none())
        .def_readonly("dead_band", &ValveSettings::dead_band)
        .def_readonly("stick", &ValveSettings::stick)
        .def_readonly("resolution", &ValveSettings::resolution)
        .def_readonly("travel_rate_per_s", &ValveSettings::travel_rate_per_s, "or None")
        .def_property_readonly("perfect", &ValveSettings::perfect, "the position is the demand")
        .def("__eq__", [](const ValveSettings& a, const ValveSettings& b) { return a == b; }, py::is_operator())
        .def("__repr__", [](const ValveSettings& v) { return text_of(v); });
    py::class_<TransmitterSettings>(m, "TransmitterSettings",
                                    "What stands between the process value and the controller. Immutable.\n\n"
                                    "lag: time constant, s\n"
                                    "resolution: smallest step of the measured value; 0.0244 % of span at 12 bits")
        .def(py::init([](double lag, double resolution) {
                 const TransmitterSettings transmitter{.lag = lag, .resolution = resolution};
                 tw::check(transmitter);
                 return transmitter;
             }),
             py::kw_only(), "lag"_a = 0.0, "resolution"_a = 0.0)
        .def_readonly("lag", &TransmitterSettings::lag, "s")
        .def_readonly("resolution", &TransmitterSettings::resolution)
        .def_property_readonly("perfect", &TransmitterSettings::perfect, "the measured value is the process value")
        .def("__eq__", [](const TransmitterSettings& a, const TransmitterSettings& b) { return a == b; }, py::is_operator())
        .def("__repr__", [](const TransmitterSettings& t) { return text_of(t); });
}

void bind_blocks(py::module_& m) {
    py::class_<Valve>(m, "Valve",
                      "A control valve with its faults, stepped once per scan. Starts at rest in the middle of its dead band.\n\n"
                      "position_low, position_high: ends of the travel; initial_position: None is the low end")
        .def(py::init<const ValveSettings&, double, double, double, std::optional<double>>(), "settings"_a, py::kw_only(),
             "scan_time"_a, "position_low"_a = 0.0, "position_high"_a = 100.0, "initial_position"_a = py::none())
        .def("step", &Valve::step, "demand"_a,
             "One scan; returns the position. A demand that is not finite is taken as the one before.")
        .def_property_readonly("position", &Valve::position)
        .def_property_readonly("settings", &Valve::settings)
        .def_property_readonly("position_low", [](const Valve& v) { return v.coefficients().position_low; })
        .def_property_readonly("position_high", [](const Valve& v) { return v.coefficients().position_high; })
        .def("__repr__", [](const Valve& v) {
            return Line("Valve").add("position", short_text(v.position())).add("settings", text_of(v.settings())).done();
        });
    py::class_<Transmitter>(m, "Transmitter",
                            "What the controller sees of a process value, once per scan: behind a lag, with noise, then rounded to the\n"
                            "nearest multiple of the resolution.\n\n"
                            "noise: standard deviation; seed: equal seeds give equal values\n"
                            "initial_value: at rest there; None: at the first value it is given")
        .def(py::init<const TransmitterSettings&, double, double, std::uint64_t, std::optional<double>>(), "settings"_a,
             py::kw_only(), "scan_time"_a, "noise"_a = 0.0, "seed"_a = 1, "initial_value"_a = py::none())
        .def("step", &Transmitter::step, "process_value"_a,
             "One scan; returns the measured value. One that is not finite is handed on as it is and not remembered.")
        .def_property_readonly("measured", &Transmitter::measured, "what the last step returned; None before the first")
        .def_property_readonly("settings", &Transmitter::settings)
        .def_property_readonly("noise", [](const Transmitter& t) { return t.coefficients().noise; })
        .def_property_readonly("seed", [](const Transmitter& t) { return t.coefficients().seed; })
        .def("__repr__", [](const Transmitter& t) {
            return Line("Transmitter").add("measured", optional_text(t.measured())).add("settings", text_of(t.settings()))
                .unless(0.0, "noise", t.coefficients().noise).done();
        });
}

}  // namespace

void bind_instruments(py::module_& m) {
    bind_settings(m);
    bind_blocks(m);
}

}  // namespace binding
