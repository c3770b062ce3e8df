#include "bind.hpp"

namespace binding {

namespace {

namespace run = tw::run;

// The block with what only a caller outside real time needs: a manual output that can be read back.
class PidBlock {
public:
    PidBlock(const tw::PidSettings& settings, double scan_time, double output_low, double output_high,
             std::optional<double> initial_output, std::optional<double> output_rate_limit) {
        auto coefficients = tw::discretize(settings, scan_time);
        if (output_rate_limit) coefficients.output_change_per_scan = checked_rate(*output_rate_limit) * scan_time;
        for (const auto& [name, value] : {std::pair{"output_low", output_low}, {"output_high", output_high},
                                          {"initial_output", initial_output.value_or(0.0)}})
            if (!tw::is_finite(value))
                throw tw::Error(tw::error_code::not_finite,
                                std::string(name) + " is " + tw::text_of(value) + "; give a finite number");
        if (!(output_low < output_high))
            throw tw::Error(tw::error_code::out_of_domain, "output_high is " + tw::text_of(output_high) +
                                                               "; give a high limit above output_low, " +
                                                               tw::text_of(output_low));
        block_ = initial_output ? run::PidBlock(coefficients, output_low, output_high, *initial_output)
                                : run::PidBlock(coefficients, output_low, output_high);
        manual_output_ = block_.output();
    }

    double step(double setpoint, double process_value) noexcept { return block_.step(setpoint, process_value); }
    const run::PidBlock& block() const noexcept { return block_; }
    const char* mode() const noexcept { return block_.mode() == run::Mode::manual ? "manual" : "automatic"; }
    void set_mode(const std::string& word) {
        constexpr std::array<Word<run::Mode>, 2> words = {{{"manual", run::Mode::manual}, {"automatic", run::Mode::automatic}}};
        const run::Mode mode = value_of(words, "mode", word);
        if (mode == run::Mode::automatic) return block_.to_automatic();
        if (block_.mode() != run::Mode::manual) manual_output_ = block_.output();
        block_.to_manual();
    }
    double manual_output() const noexcept { return manual_output_; }
    void set_manual_output(double output) {
        if (block_.set_manual_output(output) != tw::error_code::ok)
            throw tw::Error(tw::error_code::not_finite,
                            "manual_output is " + tw::text_of(output) + "; give a finite number");
        manual_output_ = std::min(std::max(output, block_.output_low()), block_.output_high());
    }

private:
    static double checked_rate(double rate) {
        if (!tw::is_finite(rate))
            throw tw::Error(tw::error_code::not_finite, "output_rate_limit is " + tw::text_of(rate) + "; give a finite number");
        if (!(rate > 0.0))
            throw tw::Error(tw::error_code::out_of_domain,
                            "output_rate_limit is " + tw::text_of(rate) + "; give a number above 0, or None for no limit");
        return rate;
    }

    run::PidBlock block_;
    double manual_output_ = 0.0;
};

class ProcessBlock {
public:
    ProcessBlock(const tw::TransferFunction& process, double scan_time, double rest_output, double rest_process_value)
        : block_(tw::discretize(process, scan_time), rest_output, rest_process_value),
          delay_line_(run::delay_line_length(block_.coefficients())) {
        for (const auto& [name, value] : {std::pair{"rest_output", rest_output}, {"rest_process_value", rest_process_value}})
            if (!tw::is_finite(value))
                throw tw::Error(tw::error_code::not_finite,
                                std::string(name) + " is " + tw::text_of(value) + "; give a finite number");
        block_.start(delay_line_.data(), delay_line_.size());
    }
    double step(double output) noexcept { return block_.step(output, delay_line_.data()); }
    double process_value() const noexcept { return block_.process_value(); }

private:
    run::ProcessBlock block_;
    std::vector<double> delay_line_;
};

}  // namespace

void bind_run(py::module_& m) {
    m.attr("flag_bad_input") = static_cast<std::uint32_t>(run::flag_bad_input);
    m.attr("flag_limited_low") = static_cast<std::uint32_t>(run::flag_limited_low);
    m.attr("flag_limited_high") = static_cast<std::uint32_t>(run::flag_limited_high);
    m.attr("flag_manual") = static_cast<std::uint32_t>(run::flag_manual);

    py::class_<PidBlock>(m, "PidBlock",
                         "A PID controller that runs once per scan: two degrees of freedom, filtered derivative and measurement\n"
                         "filter on the process value, output limits with anti-windup, manual and automatic without a bump.\n\n"
                         "initial_output: the first step returns it; without it the integral starts at output_low\n"
                         "output_rate_limit: fastest change of the output in automatic, per s; None: no limit")
        .def(py::init<const tw::PidSettings&, double, double, double, std::optional<double>, std::optional<double>>(),
             "settings"_a, py::kw_only(), "scan_time"_a, "output_low"_a = 0.0, "output_high"_a = 100.0,
             "initial_output"_a = py::none(), "output_rate_limit"_a = py::none())
        .def("step", &PidBlock::step, "setpoint"_a, "process_value"_a,
             "One scan; returns the output. A value that is not finite, or beyond 1e150, holds the output and sets flag_bad_input.")
        .def_property_readonly("flags", [](const PidBlock& b) { return b.block().flags(); },
                               "what the last step had to say: a sum of flag_bad_input, flag_limited_low,\n"
                               "flag_limited_high, flag_manual")
        .def_property("mode", &PidBlock::mode, &PidBlock::set_mode, "'manual' or 'automatic'; assignable")
        .def_property("manual_output", &PidBlock::manual_output, &PidBlock::set_manual_output,
                      "the output in manual; assignable, limited to the output range")
        .def_property_readonly("output", [](const PidBlock& b) { return b.block().output(); })
        .def_property_readonly("integral", [](const PidBlock& b) { return b.block().integral(); })
        .def_property_readonly("output_low", [](const PidBlock& b) { return b.block().output_low(); })
        .def_property_readonly("output_high", [](const PidBlock& b) { return b.block().output_high(); })
        .def_property_readonly("coefficients", [](const PidBlock& b) { return b.block().coefficients(); })
        .def("__repr__", [](const PidBlock& b) {
            return Line("PidBlock").add("mode", b.mode()).add("output", short_text(b.block().output()))
                .add("flags", std::to_string(b.block().flags())).done();
        });

    py::class_<ProcessBlock>(m, "ProcessBlock",
                             "A process of a named form with exact, fractional dead time, stepped once per scan about an operating\n"
                             "point: rest_output held keeps the process value at rest_process_value.")
        .def(py::init<const tw::TransferFunction&, double, double, double>(), "G"_a, py::kw_only(), "scan_time"_a,
             "rest_output"_a = 0.0, "rest_process_value"_a = 0.0)
        .def("step", &ProcessBlock::step, "output"_a,
             "Holds the output for one scan and returns the process value at its end.")
        .def_property_readonly("process_value", &ProcessBlock::process_value)
        .def("__repr__", [](const ProcessBlock& b) {
            return Line("ProcessBlock").add("process_value", short_text(b.process_value())).done();
        });
}

}  // namespace binding
