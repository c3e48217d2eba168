// kappafeed: the window. Opens each drawing given in a window of its own, with the limits given.
// No units here.
#include <QApplication>
#include <QCommandLineParser>
#include <QTimer>
#include <clocale>
#include <functional>
#include <memory>
#include <vector>

#include "ui/window/main_window.h"

namespace {

// One drawing, one window.
struct Shown {
  explicit Shown(kf::ui::Settings& settings) : window(document, settings) {}
  kf::ui::Document document;
  kf::ui::MainWindow window;
};

}  // namespace

int main(int argc, char** argv) {
  QApplication application(argc, argv);
  std::setlocale(LC_NUMERIC, "C");  // Qt has just taken the user's; files and plots are not to follow it
  QApplication::setApplicationName(QStringLiteral("kappafeed"));
  QApplication::setOrganizationName(QStringLiteral("kappafeed"));
  QApplication::setApplicationDisplayName(QString());
  QApplication::setApplicationVersion(QStringLiteral(KAPPAFEED_VERSION));
  QApplication::setStyle(QStringLiteral("Fusion"));

  QCommandLineParser parser;
  parser.setApplicationDescription(QStringLiteral("Feed planning along 2D contours."));
  parser.addHelpOption();
  parser.addVersionOption();
  const QCommandLineOption limits(QStringLiteral("limits"), QStringLiteral("Limits file to start with."),
                                  QStringLiteral("FILE"));
  parser.addOption(limits);
  parser.addPositionalArgument(QStringLiteral("FILE"), QStringLiteral("Drawings to open."),
                               QStringLiteral("[FILE...]"));
  parser.process(application);

  kf::ui::Settings settings;
  std::vector<std::unique_ptr<Shown>> windows;
  std::function<Shown&()> open = [&]() -> Shown& {
    windows.push_back(std::make_unique<Shown>(settings));
    Shown& shown = *windows.back();
    QObject::connect(&shown.window, &kf::ui::MainWindow::windowWanted, &shown.window,
                     [&](const QString& path) { open().window.openDrawing(path); });
    if (parser.isSet(limits)) shown.document.loadLimits(parser.value(limits));
    shown.document.undoStack().clear();
    shown.window.show();
    return shown;
  };
  // From inside the event loop, so that a question about a drawing can be answered.
  QTimer::singleShot(0, &application, [&] {
    const QStringList files = parser.positionalArguments();
    if (files.isEmpty()) open();
    for (const QString& file : files) open().window.openDrawing(file);
  });
  return QApplication::exec();
}
