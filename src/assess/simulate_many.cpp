#include "tauwright/assess/simulate_many.hpp"

#include <algorithm>
#include <cstring>

#include "assess/driven_process.hpp"
#include "assess/duty_columns.hpp"
#include "assess/lane_setup.hpp"

namespace tauwright {
inline namespace v0 {

namespace {

using detail::LaneKind;
using detail::LaneRow;
using detail::lanes_of_block;

constexpr std::size_t blocks_of_group = 16;                              // loops that share a stretch of every row
constexpr std::size_t loops_of_group = blocks_of_group * lanes_of_block;
constexpr std::size_t scans_of_tile = 32;                                // worked off by one block after another, in cache

// The duty as arrays, and as what the lanes ask of it.
struct Prepared {
    Trend columns;
    std::vector<double> noise;
    detail::SharedDuty shared = {};
    detail::DutySizes sizes = {};
};

Prepared prepare(const Duty& duty, std::size_t scans) {
    const double h = *duty.scan_time;
    Prepared p{.columns = detail::known_columns(duty, h, scans), .noise = std::vector<double>(scans)};
    for (double& sp : p.columns.setpoint) sp = sp < 1e-200 && sp > -1e-200 ? 0.0 : sp;  // as PidBlock takes it
    if (duty.noise > 0.0) {
        run::Noise noise(duty.seed);
        for (double& x : p.noise) x = duty.noise * noise.next();
    }
    p.shared = detail::shared_duty(duty);
    p.shared.setpoint = p.columns.setpoint.data();
    p.shared.load = p.columns.load.data();
    p.shared.noise = p.noise.data();
    p.sizes = detail::sizes_of(duty, scans);
    return p;
}

// Where a loop's values go.
struct Table {
    std::size_t scans, loops;
    double *process_value, *output;
};

// The results of a tile, on their way to the table while the next tile is worked out.
struct Tile {
    LaneRow *process_value, *output;
    detail::RowsUnderWay process_values_under_way, outputs_under_way;

    static constexpr std::size_t value_rows = (scans_of_tile + 1) * blocks_of_group, output_rows = scans_of_tile * blocks_of_group;

    explicit Tile(LaneRow* rows) noexcept : process_value(rows), output(rows + value_rows) {}

    void send(const Table& table, std::size_t first_scan, std::size_t count, std::size_t first_loop, std::size_t width) noexcept {
        const std::size_t to = first_scan * table.loops + first_loop;
        process_values_under_way = {process_value->lane, loops_of_group, table.process_value + to, table.loops, width, count};
        outputs_under_way = {output->lane, loops_of_group, table.output + to, table.loops, width, count};
    }
    void arrive() noexcept {
        process_values_under_way.rest();
        outputs_under_way.rest();
    }
};

struct Block {
    detail::LoopLanes lanes;
    LaneKind kind;
    bool one_delay;
    std::size_t longest_delay;
    LaneRow* line;
    std::size_t line_rows, first_row;

    // The line runs on for as long as its rows last, then what is still to act goes back to its beginning.
    std::size_t rows_needed() const noexcept { return 1 + longest_delay + scans_of_tile + std::max(scans_of_tile, longest_delay); }

    // All but the first rows are written before they are read.
    void start_line(LaneRow* rows) noexcept {
        line = rows;
        line_rows = rows_needed();
        first_row = 1;
        std::fill_n(line, 1 + longest_delay, LaneRow{});
    }

    void run(const detail::SharedDuty& duty, std::size_t first, std::size_t count, Tile& tile, std::size_t place, Tile& before) noexcept {
        if (first_row + count + longest_delay > line_rows) {
            std::memmove(line, line + first_row - 1, (1 + longest_delay) * sizeof(LaneRow));
            first_row = 1;
        }
        const detail::LaneRun lane_run{duty, first, count, one_delay, line + first_row, tile.process_value + place, tile.output + place,
                                       blocks_of_group, &before.process_values_under_way, &before.outputs_under_way};
        if (kind == LaneKind::first_order_pi) run_first_order_pi(lanes, lane_run);
        else if (kind == LaneKind::first_order_pid) run_first_order_pid(lanes, lane_run);
        else run_any_lanes(lanes, lane_run);
        first_row += count;
    }
};

[[noreturn]] void refuse_loop(std::size_t i, const Error& error) {
    throw Error(error.code(), detail::joined({detail::item_name("loops", i), ": ", error.what()}));
}

LaneKind fill_lane(detail::LoopLanes& lanes, std::size_t j, std::span<const LoopToSimulate> loops, std::size_t i, const Prepared& p) {
    const auto& [process, settings] = loops[i];
    if (!detail::fits_process_block(process)) return LaneKind::alone;
    try {
        return set_lane(lanes, j, process, settings, *p.columns.duty.scan_time, p.shared, p.sizes);
    } catch (const Error& error) {
        refuse_loop(i, error);
    }
}

// All of a block's loops from `first_loop` on; those that must run alone are noted.
void fill(Block& block, std::span<const LoopToSimulate> loops, std::size_t first_loop, const Prepared& p, std::vector<std::size_t>& alone) {
    const std::size_t count = std::min(lanes_of_block, loops.size() - first_loop);
    block.kind = LaneKind::first_order_pi;
    block.one_delay = true;
    block.longest_delay = 0;
    bool idle[lanes_of_block] = {};
    for (std::size_t j = 0; j < lanes_of_block; ++j) {
        LaneKind kind = LaneKind::alone;
        if (j < count) {
            kind = fill_lane(block.lanes, j, loops, first_loop + j, p);
            if (kind == LaneKind::alone) alone.push_back(first_loop + j);
        }
        idle[j] = kind == LaneKind::alone;
        if (idle[j]) {
            set_idle_lane(block.lanes, j, p.shared);
            continue;
        }
        block.kind = std::max(block.kind, kind);
        std::size_t& delay = block.lanes.delay_scans[j];
        delay = std::min(delay, p.noise.size());  // later than the last scan is never
        block.longest_delay = std::max(block.longest_delay, delay);
    }
    for (std::size_t j = 0; j < lanes_of_block; ++j) {
        if (idle[j]) block.lanes.delay_scans[j] = block.longest_delay;
        block.lanes.ahead[j] = block.lanes.delay_scans[j] * lanes_of_block + j;
        block.one_delay = block.one_delay && block.lanes.delay_scans[j] == block.longest_delay;
    }
}

// A group of blocks through all scans, tile by tile; each tile's rows go to the caller's in one stretch.
void run_group(std::span<Block> blocks, const Prepared& p, std::size_t first_loop, const Table& table, std::vector<LaneRow>& memory) {
    constexpr std::size_t tile_rows = Tile::value_rows + Tile::output_rows;
    std::size_t rows = 2 * tile_rows;
    for (const Block& b : blocks) rows += b.rows_needed();
    if (memory.size() < rows) memory.resize(rows);
    Tile tiles[2] = {Tile(memory.data()), Tile(memory.data() + tile_rows)};
    LaneRow* line = memory.data() + 2 * tile_rows;
    for (Block& b : blocks) {
        b.start_line(line);
        line += b.line_rows;
    }
    const std::size_t width = std::min(blocks.size() * lanes_of_block, table.loops - first_loop);
    for (std::size_t first = 0, now = 0; first < table.scans; first += scans_of_tile, now = 1 - now) {
        const std::size_t count = std::min(scans_of_tile, table.scans - first);
        for (std::size_t i = 0; i < blocks.size(); ++i) blocks[i].run(p.shared, first, count, tiles[now], i, tiles[1 - now]);
        tiles[1 - now].arrive();
        tiles[now].send(table, first, count, first_loop, width);
    }
    for (Tile& tile : tiles) tile.arrive();
}

void run_alone(const LoopToSimulate& loop, const Duty& duty, double horizon_s, std::size_t i, const Table& table) {
    const Trend trend = simulate(loop.process, loop.settings, duty, horizon_s);
    for (std::size_t k = 0; k < table.scans; ++k) {
        const std::size_t from = std::min(k, trend.size() - 1);
        table.process_value[k * table.loops + i] = trend.process_value[from];
        table.output[k * table.loops + i] = trend.output[from];
    }
}

void check_length(std::string_view name, std::size_t length, std::size_t scans, std::size_t loops) {
    const std::size_t needed = scans * loops;
    if (length == needed) return;
    const auto number = [](std::size_t n) { return text_of(static_cast<double>(n)); };
    throw Error(length < needed ? error_code::buffer_too_small : error_code::out_of_domain,
                detail::joined({name, " has room for ", number(length), " values; give ", number(needed), ", which is ",
                                number(scans), " scans times ", number(loops), " loops"}));
}

void run_groups(std::span<const LoopToSimulate> loops, const Duty& duty, const Table& table, std::vector<std::size_t>& alone) {
    const Prepared p = prepare(duty, table.scans);
    std::vector<Block> blocks(std::min(blocks_of_group, (loops.size() + lanes_of_block - 1) / lanes_of_block));
    std::vector<LaneRow> memory;
    for (std::size_t first = 0; first < loops.size(); first += loops_of_group) {
        const std::size_t width = std::min(loops_of_group, loops.size() - first);
        const std::span group(blocks.data(), (width + lanes_of_block - 1) / lanes_of_block);
        for (std::size_t i = 0; i < group.size(); ++i) fill(group[i], loops, first + i * lanes_of_block, p, alone);
        run_group(group, p, first, table, memory);
        for (std::size_t i = 0; i < width; ++i)
            if (group[i / lanes_of_block].lanes.ran_away[i % lanes_of_block] != 0.0) alone.push_back(first + i);
    }
    detail::copies_past_caches_done();
}

}  // namespace

std::size_t scans_of(const Duty& duty, double horizon_s) {
    check(duty);
    detail::require_positive("horizon", horizon_s);
    if (!duty.scan_time)
        throw Error(error_code::missing_argument, "duty.scan_time is not given; the simulated controllers need one");
    return detail::count_of_scans(*duty.scan_time, horizon_s);
}

void simulate_many(std::span<const LoopToSimulate> loops, const Duty& duty, double horizon_s,
                   std::span<double> process_value, std::span<double> output) {
    const Table table{scans_of(duty, horizon_s), loops.size(), process_value.data(), output.data()};
    check_length("process_value", process_value.size(), table.scans, table.loops);
    check_length("output", output.size(), table.scans, table.loops);
    std::vector<std::size_t> alone;
    if (duty.valve.perfect() && duty.transmitter.perfect() && !detail::load_ramps(duty)) run_groups(loops, duty, table, alone);
    else
        for (std::size_t i = 0; i < loops.size(); ++i) alone.push_back(i);
    for (std::size_t i : alone) {
        try {
            run_alone(loops[i], duty, horizon_s, i, table);
        } catch (const Error& error) {
            refuse_loop(i, error);
        }
    }
}

}  // namespace v0
}  // namespace tauwright
