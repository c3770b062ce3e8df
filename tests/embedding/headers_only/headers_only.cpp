// Compiled with the include path alone and linked against nothing: the closed-form half.
#include <tauwright/assess/assess.hpp>
#include <tauwright/control/control.hpp>
#include <tauwright/discretize/discretize.hpp>
#include <tauwright/model/model.hpp>

int main() {
    using namespace tauwright;
    const TransferFunction process = first_order_plus_dead_time(2.0, 10.0, 3.0) * integrating_plus_dead_time(0.1, 1.0);
    const PidSettings settings{.gain = 2.5, .integral_time = 12.5, .derivative_time = 2.0};
    const Entered entered = entered_as(settings, {.equation = Equation::series});  // trade facts A02: 2, 10, 2.5
    run::PidBlock block(discretize(settings, 0.5), 0.0, 100.0, 40.0);
    const double y = step_response(first_order_plus_dead_time(2.0, 10.0, 3.0), std::vector<double>{13.0})[0];
    const bool right = process.order() == 2 && *entered.gain == 2.0 && *entered.integral_time == 10.0 &&
                       *entered.derivative_time == 2.5 && block.step(50.0, 48.0) == 40.0 && y > 1.26 && y < 1.27;
    return right ? 0 : 1;
}
