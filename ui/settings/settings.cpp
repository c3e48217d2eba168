// What the program remembers between runs.
// No units here.
#include "ui/settings/settings.h"

#include <QStringList>
#include <array>

namespace kf::ui {
namespace {

struct Row {
  Key key;
  const char* name;
  QVariant fallback;
};

const Row& rowOf(Key key) {
  static const std::array<Row, 5> table = {{
      {Key::windowGeometry, "window/geometry", {}},
      {Key::windowState, "window/state", {}},
      {Key::shownInches, "view/inches", false},
      {Key::lastFolder, "files/last_folder", QString()},
      {Key::confirmedLimits, "export/limits_confirmed", QStringList()},  // names whose cautions were read
  }};
  return table[static_cast<std::size_t>(key)];
}

}  // namespace

Settings::Settings(const QString& iniFile)
    : store_(iniFile.isEmpty() ? std::make_unique<QSettings>()
                               : std::make_unique<QSettings>(iniFile, QSettings::IniFormat)) {}

QVariant Settings::value(Key key) const {
  return store_->value(QLatin1String(rowOf(key).name), rowOf(key).fallback);
}
void Settings::set(Key key, const QVariant& value) {
  store_->setValue(QLatin1String(rowOf(key).name), value);
}

}  // namespace kf::ui
