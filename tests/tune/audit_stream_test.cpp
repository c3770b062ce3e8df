#include <algorithm>
#include <cmath>
#include <filesystem>
#include <random>
#include <stdexcept>
#include <thread>

#include "catch_compat.hpp"
#include "tauwright/tauwright.hpp"

using namespace tauwright;
using Catch::Matchers::ContainsSubstring;

namespace {

// Processes, forms and settings of every kind, some of them senseless; the seed is printed on failure.
std::vector<AuditLoop> mixed_loops(std::size_t n, unsigned seed) {
    std::mt19937 generator(seed);
    const auto between = [&](double low, double high) {
        return low * std::pow(high / low, static_cast<double>(generator()) / 4294967295.0);
    };
    std::vector<AuditLoop> loops;
    for (std::size_t i = 0; i < n; ++i) {
        AuditLoop loop{.name = "loop " + std::to_string(i)};
        const unsigned kind = generator() % 4;
        Factors f{.gain = between(0.2, 5.0), .integrators = kind == 0, .dead_time = between(0.1, 20.0)};
        if (kind > 0) f.lags.push_back(between(1.0, 100.0));
        if (kind > 1) f.lags.push_back(between(1.0, 30.0));
        loop.process = TransferFunction::from_factors(f);
        loop.settings = PidSettings{.gain = between(0.05, 20.0), .integral_time = between(2.0, 200.0)};
        if (i % 13 == 5) loop.settings->gain = -loop.settings->gain;
        if (i % 17 == 3) loop.settings->integral_time = 0.0;  // fails
        if (i % 19 == 7) loop.process.reset();                // fails
        if (i % 3 == 0) loop.form = ControllerForm{.gain_as = GainAs::proportional_band, .gain_resolution = 1.0};
        if (kind < 2) loop.duty = {.setpoint_step = 5.0, .noise = 0.1, .seed = i, .scan_time = between(0.2, 1.0)};
        loops.push_back(loop);
    }
    return loops;
}

std::size_t threads_of_this_process() {
    const auto tasks = std::filesystem::directory_iterator("/proc/self/task");
    return static_cast<std::size_t>(std::distance(begin(tasks), end(tasks)));
}

struct Failure : std::runtime_error {
    Failure() : std::runtime_error("the caller's own") {}
};

}  // namespace

TEST_CASE("many audits are equal to one by one, for any number of threads", "[invariant]") {
    const unsigned seed = 20;
    CAPTURE(seed);
    const std::vector<AuditLoop> loops = mixed_loops(300, seed);
    std::vector<AuditRow> alone;
    for (const AuditLoop& loop : loops) alone.push_back(audit(loop));
    const std::size_t before = threads_of_this_process();
    for (unsigned threads : {1u, 2u, 3u, 8u}) {
        CAPTURE(threads);
        CHECK(audit(loops, {.threads = threads}) == alone);
        std::size_t given = 0, most_held = 0;
        std::vector<AuditRow> rows;
        const std::thread::id here = std::this_thread::get_id();
        bool elsewhere = false;
        const AuditSummary summary = audit(
            [&](AuditLoop& loop) {
                elsewhere |= std::this_thread::get_id() != here || loop != AuditLoop{};
                if (given == loops.size()) return false;
                loop = loops[given++];
                most_held = std::max(most_held, given - rows.size());
                return true;
            },
            [&](const AuditRow& row) {
                elsewhere |= std::this_thread::get_id() != here;
                rows.push_back(row);
            },
            {.threads = threads, .progress = [&](std::size_t done) {
                 elsewhere |= std::this_thread::get_id() != here || done > given;
                 return true;
             }});
        CHECK(rows == alone);
        CHECK(summary == summary_of(alone));
        CHECK_FALSE(elsewhere);
        CHECK(most_held <= 64 * threads);
        CHECK(threads_of_this_process() == before);
    }
    const auto failed = std::count_if(alone.begin(), alone.end(), [](const AuditRow& r) { return !r.error.empty(); });
    CHECK(summary_of(alone).failed == static_cast<std::size_t>(failed));
    CHECK(failed >= 300 / 17);
    CHECK(summary_of(alone).unstable_in_service > 0);
    CHECK(summary_of(alone).changes_worthwhile > 0);
}

TEST_CASE("a cancelled audit gives what is done", "[invariant]") {
    const std::vector<AuditLoop> loops = mixed_loops(200, 3);
    const std::vector<AuditRow> all = audit(loops);
    for (unsigned threads : {1u, 4u}) {
        const auto stop_at_70 = [](std::size_t done) { return done < 70; };
        const std::vector<AuditRow> part = audit(loops, {.threads = threads, .progress = stop_at_70});
        CHECK(part.size() >= 70);
        CHECK((part.size() == 70 || threads > 1));
        CHECK(std::equal(part.begin(), part.end(), all.begin()));
        std::size_t given = 0;
        std::vector<AuditRow> rows;
        const AuditSummary summary = audit(
            [&](AuditLoop& loop) {
                if (given == loops.size()) return false;
                loop = loops[given++];
                return true;
            },
            [&](const AuditRow& row) { rows.push_back(row); }, {.threads = threads, .progress = stop_at_70});
        CHECK(summary.cancelled);
        CHECK(summary.rows == rows.size());
        CHECK(rows.size() >= 70);
        CHECK(std::equal(rows.begin(), rows.end(), all.begin()));
    }
}

TEST_CASE("what the caller's functions throw passes through, and no thread is left", "[invariant]") {
    const std::vector<AuditLoop> loops = mixed_loops(300, 4);
    const std::size_t before = threads_of_this_process();
    for (const std::string thrower : {"source", "sink", "progress"}) {
        CAPTURE(thrower);
        std::size_t given = 0;
        const auto source = [&](AuditLoop& loop) {
            if (thrower == "source" && given == 290) throw Failure();
            if (given == loops.size()) return false;
            loop = loops[given++];
            return true;
        };
        const auto sink = [&](const AuditRow&) {
            if (thrower == "sink") throw Failure();
        };
        const auto progress = [&](std::size_t done) {
            if (thrower == "progress" && done > 10) throw Failure();
            return true;
        };
        CHECK_THROWS_AS(audit(source, sink, {.threads = 4, .progress = progress}), Failure);
        CHECK(threads_of_this_process() == before);
    }
    for (unsigned repeat = 0; repeat < 20; ++repeat)  // also where the others leave nothing to this thread
        CHECK_THROWS_AS(audit(std::span(loops).first(9), {.threads = 4, .progress = [](std::size_t) -> bool { throw Failure(); }}), Failure);
    std::size_t last = 0;
    audit(loops, {.threads = 4, .progress = [&](std::size_t done) {
              last = done;
              return true;
          }});
    CHECK(last == loops.size());
    CHECK(threads_of_this_process() == before);
}

TEST_CASE("what makes no audit is refused", "[closed form]") {
    const auto code_of = [](auto call) {
        try {
            call();
        } catch (const Error& e) {
            return std::string(name_of(e.code())) + ": " + e.what();
        }
        return std::string("accepted");
    };
    const std::vector<AuditLoop> loops(1);
    const auto source = [](AuditLoop&) { return false; };
    const auto sink = [](const AuditRow&) {};
    CHECK_THAT(code_of([&] { audit(loops, {.threads = 0}); }), ContainsSubstring("out_of_domain: options.threads is 0"));
    CHECK_THAT(code_of([&] { audit(source, sink, {.threads = 1025}); }), ContainsSubstring("out_of_domain"));
    CHECK_THAT(code_of([&] { audit({}, sink); }), ContainsSubstring("missing_argument: source"));
    CHECK_THAT(code_of([&] { audit(source, {}); }), ContainsSubstring("missing_argument: sink"));
    CHECK(audit(source, sink) == AuditSummary{});
    CHECK(audit(std::vector<AuditLoop>{}, {.threads = 8}).empty());
    CHECK(audit(loops)[0].code == error_code::missing_argument);
}
