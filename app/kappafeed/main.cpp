// kappafeed: the window. Opens the drawing given, with the limits given.
// No units here.
#include <QApplication>
#include <QCommandLineParser>
#include <QTimer>
#include <clocale>

#include "ui/window/main_window.h"

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
  parser.addPositionalArgument(QStringLiteral("FILE"), QStringLiteral("Drawing to open."),
                               QStringLiteral("[FILE]"));
  parser.process(application);

  kf::ui::Settings settings;
  kf::ui::Document document;
  kf::ui::MainWindow window(document, settings);
  window.show();
  QTimer::singleShot(0, &window, [&] {
    if (parser.isSet(limits)) document.loadLimits(parser.value(limits));
    document.undoStack().clear();
    if (!parser.positionalArguments().isEmpty())
      window.openDrawing(parser.positionalArguments().constFirst());
  });
  return QApplication::exec();
}
