// Work in the background: one request at a time, the latest wins.
// No units here.
#pragma once

#include <QFutureWatcher>
#include <QObject>
#include <QtConcurrent>
#include <functional>
#include <memory>

#include "core/base/result.h"
#include "core/base/run_control.h"

namespace kf::ui {

// Runs `work` on the thread pool and hands its result to `done` on the caller's thread. A newer start()
// cancels and silences the run before. The owner outlives nothing: when it goes, runs are cancelled and
// waited for.
template <class Value>
class Runner : public QObject {
 public:
  using Work = std::function<Result<Value>(RunControl&)>;
  using Done = std::function<void(Result<Value>)>;

  explicit Runner(QObject* parent = nullptr) : QObject(parent) {}
  ~Runner() override { stop(true); }
  Runner(const Runner&) = delete;
  Runner& operator=(const Runner&) = delete;

  void start(Work work, Done done) {
    stop(false);
    control_ = std::make_shared<RunControl>();
    auto* watcher = new QFutureWatcher<std::shared_ptr<Result<Value>>>(this);
    const std::size_t ticket = ++ticket_;
    connect(watcher, &QFutureWatcherBase::finished, this, [this, watcher, ticket, done] {
      watcher->deleteLater();
      if (ticket == ticket_ && busy_) {
        busy_ = false;
        done(std::move(*watcher->result()));
      }
    });
    busy_ = true;
    future_ = QtConcurrent::run([work = std::move(work), control = control_] {
      return std::make_shared<Result<Value>>(work(*control));
    });
    watcher->setFuture(future_);
  }

  void cancel() { stop(false); }
  bool isBusy() const { return busy_; }
  double progress() const { return control_ ? control_->progress() : 0.0; }

 private:
  void stop(bool wait) {
    if (control_) control_->cancel();
    busy_ = false;
    ++ticket_;
    if (wait && future_.isValid()) future_.waitForFinished();
  }

  std::shared_ptr<RunControl> control_;
  QFuture<std::shared_ptr<Result<Value>>> future_;
  std::size_t ticket_ = 0;
  bool busy_ = false;
};

}  // namespace kf::ui
