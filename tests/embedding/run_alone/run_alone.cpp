// What firmware uses: the blocks and the coefficients of PID, without exceptions, RTTI or a heap.
#include <tauwright/control/pid_settings.hpp>
#include <tauwright/discretize/pid.hpp>
#include <tauwright/run/run.hpp>

static_assert(tauwright::run::gives_same_bits());

int main() {
    using namespace tauwright;
    run::PidCoefficients coefficients;
    if (discretize(PidSettings{.gain = 2.0, .integral_time = 10.0}, 1.0, coefficients) != error_code::ok) return 1;
    if (discretize(PidSettings{.gain = 2.0, .integral_time = 10.0}, 0.0, coefficients) != error_code::out_of_domain) return 2;
    run::PidBlock block(coefficients, 0.0, 100.0, 40.0);
    // Trade facts D14, recomputed: position PI, backward, bumpless take-over from 40 %.
    const double values[] = {48.0, 48.5, 49.2, 49.8, 50.3, 50.4};
    const double expected[] = {40.0, 39.3, 38.06, 36.9, 35.84, 35.56};
    for (int k = 0; k < 6; ++k) {
        const double difference = block.step(50.0, values[k]) - expected[k];
        if (difference > 1e-12 || difference < -1e-12) return 3;
    }
    return 0;
}
