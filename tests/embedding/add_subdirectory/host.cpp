#include <tauwright/tauwright.hpp>

int main() {
    const auto process = tauwright::first_order_plus_dead_time(2.0, 10.0, 3.0);
    const auto answer = tauwright::synthesize(process, {.time_constant = 5.0});
    return answer.settings && answer.settings->gain == 0.625 ? 0 : 1;  // 10 / (2 (5 + 3))
}
