// From a bump-test record to settings and a running block, in C++.
#include <cstdio>
#include <vector>

#include <tauwright/tauwright.hpp>

int main(int argc, char** argv) try {
    namespace tw = tauwright;
    const tw::Record record = tw::read_record(argc > 1 ? argv[1] : "bottle_washer.csv");

    // What the record says of the process, and whether to tune at all.
    const tw::FittedModel fit = tw::identify(record);
    for (const tw::Finding& f : fit.findings) std::printf("found %s: %s\n", tw::name_of(f.code), f.message.c_str());
    if (fit.advice() > tw::Advice::tune_with_care || !fit.model || fit.lags.empty()) {
        std::printf("advice: %s\n", tw::name_of(fit.advice()));
        return 1;
    }

    // Ask for a closed loop twice as slow as the dead time; the controller follows.
    const tw::TransferFunction process = tw::in_percent(*fit.model, *record.process_value_range(), *record.output_range());
    const tw::Synthesis answer = tw::synthesize(process, {.time_constant = 2.0 * fit.dead_time});
    const tw::PidSettings settings = answer.settings.value();
    const tw::Robustness margins = tw::robustness(process, settings, {.scan_time = 1.0});

    // Run the block against the sampled process: ten scans after a set-point step.
    tw::run::PidBlock controller(tw::discretize(settings, 1.0), 0.0, 100.0, 50.0);
    tw::run::ProcessBlock plant(tw::discretize(process, 1.0), 50.0, 50.0);
    std::vector<double> delay_line(tw::run::delay_line_length(plant.coefficients()));
    plant.start(delay_line.data(), delay_line.size());
    controller.step(50.0, 50.0);
    double value = 50.0, output = 50.0;
    for (int scan = 0; scan < 10; ++scan) {
        output = controller.step(54.0, value);
        value = plant.step(output, delay_line.data());
    }

    std::printf("gain %.17g\nlag_1 %.17g\ndead_time %.17g\n", fit.gain, fit.lags[0], fit.dead_time);
    std::printf("controller_gain %.17g\nintegral_time_s %.17g\n", settings.gain, settings.integral_time.value());
    std::printf("gain_margin %.17g\nphase_margin_deg %.17g\nmax_sensitivity %.17g\n", *margins.gain_margin,
                *margins.phase_margin_deg, *margins.max_sensitivity);
    std::printf("block_output_10 %.17g\n", output);
    return 0;
} catch (const tauwright::Error& e) {
    std::fprintf(stderr, "%s: %s\n", tauwright::name_of(e.code()), e.what());
    return 2;
}
