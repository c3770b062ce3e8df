// The only threads of the library: started where a caller asks for more than one, joined before its
// call returns.
#pragma once

#include <atomic>
#include <condition_variable>
#include <cstddef>
#include <exception>
#include <functional>
#include <mutex>
#include <thread>
#include <vector>

namespace tauwright {
inline namespace v0 {
namespace detail {

/// Does one piece of work for every index of a batch, on the calling thread and up to `threads` - 1 others.
class AuditWorkers {
public:
    /// `work(i)` may run on any thread, each index once.
    AuditWorkers(unsigned threads, std::function<void(std::size_t)> work);
    ~AuditWorkers();
    AuditWorkers(const AuditWorkers&) = delete;
    AuditWorkers& operator=(const AuditWorkers&) = delete;

    /// Works on 0 to count - 1, begun in order. `go_on(done)` is asked on the calling thread after each
    /// piece of its own and when all are done; where it says no, no further piece is begun. Returns how many were done: the
    /// first ones. Rethrows the first exception of work or `go_on` when every thread is idle.
    std::size_t run(std::size_t count, const std::function<bool(std::size_t done)>& go_on);

private:
    void start(std::size_t wanted);
    void wait_for_batches(std::size_t seen);
    void pull(const std::function<bool(std::size_t)>* go_on);

    unsigned threads_;
    std::function<void(std::size_t)> work_;
    std::vector<std::thread> others_;
    std::mutex mutex_;
    std::condition_variable wake_, idle_;
    std::size_t batch_ = 0, busy_ = 0;  // guarded by the mutex
    bool ended_ = false;
    std::exception_ptr failure_;
    std::size_t count_ = 0;             // changes only while the others are idle
    std::size_t told_ = 0;              // of the pieces done, to go_on; the calling thread's alone
    bool stopped_ = false;              // by go_on; the calling thread's alone
    std::atomic<std::size_t> next_{0}, done_{0};
};

}  // namespace detail
}  // namespace v0
}  // namespace tauwright
