#include "tune/audit_workers.hpp"

#include <algorithm>
#include <system_error>
#include <utility>

namespace tauwright {
inline namespace v0 {
namespace detail {

AuditWorkers::AuditWorkers(unsigned threads, std::function<void(std::size_t)> work)
    : threads_(threads), work_(std::move(work)) {}

AuditWorkers::~AuditWorkers() {
    {
        const std::lock_guard lock(mutex_);
        ended_ = true;
    }
    wake_.notify_all();
    for (std::thread& other : others_) other.join();
}

void AuditWorkers::start(std::size_t wanted) {
    others_.reserve(wanted);
    while (others_.size() < wanted) {
        try {
            others_.emplace_back([this, seen = batch_] { wait_for_batches(seen); });
        } catch (const std::system_error&) {
            threads_ = static_cast<unsigned>(others_.size()) + 1;  // the machine has no more: fewer give the same answer
            return;
        }
    }
}

void AuditWorkers::wait_for_batches(std::size_t seen) {
    std::unique_lock lock(mutex_);
    for (;;) {
        wake_.wait(lock, [&] { return ended_ || batch_ != seen; });
        if (ended_) return;
        seen = batch_;
        lock.unlock();
        pull(nullptr);
        lock.lock();
        if (--busy_ == 0) idle_.notify_one();
    }
}

void AuditWorkers::pull(const std::function<bool(std::size_t)>* go_on) {
    try {
        for (std::size_t i; (i = next_.fetch_add(1)) < count_;) {
            work_(i);
            const std::size_t done = done_.fetch_add(1) + 1;
            if (go_on == nullptr) continue;
            told_ = done;
            if ((*go_on)(done)) continue;
            stopped_ = true;
            next_ = count_;  // what was handed out before gets done, so that what is done has no gaps
        }
    } catch (...) {
        next_ = count_;
        const std::lock_guard lock(mutex_);
        if (!failure_) failure_ = std::current_exception();
    }
}

std::size_t AuditWorkers::run(std::size_t count, const std::function<bool(std::size_t)>& go_on) {
    start(std::min<std::size_t>(threads_, std::max<std::size_t>(count, 1)) - 1);
    {
        const std::lock_guard lock(mutex_);
        count_ = count;
        next_ = done_ = told_ = 0;
        stopped_ = false;
        busy_ = others_.size();
        ++batch_;
    }
    wake_.notify_all();
    pull(&go_on);
    {
        std::unique_lock lock(mutex_);
        idle_.wait(lock, [&] { return busy_ == 0; });
        if (failure_) std::rethrow_exception(std::exchange(failure_, nullptr));
    }
    // The last pieces may have been the others'.
    if (!stopped_ && told_ != done_) go_on(done_);
    return done_;
}

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
