// What the program remembers between runs: one table of keys with their defaults.
// No units here.
#pragma once

#include <QSettings>
#include <QString>
#include <QVariant>
#include <memory>

namespace kf::ui {

enum class Key { windowGeometry, windowState, shownInches, lastFolder, confirmedLimits };

// Passed in where it is needed; tests give it a file of their own.
class Settings {
 public:
  // Empty: the user's own store.
  explicit Settings(const QString& iniFile = {});

  QVariant value(Key key) const;
  void set(Key key, const QVariant& value);

 private:
  std::unique_ptr<QSettings> store_;
};

}  // namespace kf::ui
