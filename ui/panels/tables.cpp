// Tables: the contours of the drawing, the tight spots of the chosen one, and its joints.
// Units in the headings.
#include "ui/panels/tables.h"

#include <QHeaderView>
#include <QLabel>
#include <QVBoxLayout>
#include <algorithm>

namespace kf::ui {
namespace {

void setUp(QTableView& table, QAbstractItemModel& model, const QString& name) {
  table.setModel(&model);
  table.setAccessibleName(name);
  table.setEditTriggers(QAbstractItemView::NoEditTriggers);
  table.setSelectionBehavior(QAbstractItemView::SelectRows);
  table.setSelectionMode(QAbstractItemView::SingleSelection);
  table.setAlternatingRowColors(true);
  table.setShowGrid(false);
  table.setTabKeyNavigation(false);
  table.setWordWrap(false);
  table.setFrameShape(QFrame::NoFrame);
  table.setIconSize(QSize(10, 10));
  table.verticalHeader()->hide();
  table.verticalHeader()->setSectionResizeMode(QHeaderView::Fixed);
  table.verticalHeader()->setDefaultSectionSize(table.fontMetrics().height() + 6);
  table.horizontalHeader()->setHighlightSections(false);
  table.horizontalHeader()->setMinimumSectionSize(24);
  table.horizontalHeader()->setResizeContentsPrecision(40);  // rows looked at, so that many stay quick
  table.horizontalHeader()->setSectionResizeMode(QHeaderView::ResizeToContents);
  table.setVerticalScrollMode(QAbstractItemView::ScrollPerPixel);
  table.setHorizontalScrollMode(QAbstractItemView::ScrollPerPixel);
}

}  // namespace

ContourTable::ContourTable(Document& document, QWidget* parent)
    : QTableView(parent), document_(document), model_(document) {
  setUp(*this, model_, tr("Contours"));
  horizontalHeader()->setSectionResizeMode(1, QHeaderView::Stretch);
  connect(&document_, &Document::chosenChanged, this, &ContourTable::follow);
  connect(&model_, &QAbstractItemModel::modelReset, this, &ContourTable::follow);
  connect(selectionModel(), &QItemSelectionModel::currentRowChanged, this, [this](const QModelIndex& row) {
    if (!following_ && row.isValid()) document_.choose(row.row());
  });
  follow();
}

void ContourTable::follow() {
  following_ = true;
  if (document_.chosen() < model_.rowCount()) setCurrentIndex(model_.index(document_.chosen(), 0));
  following_ = false;
}

SpotTable::SpotTable(Document& document, QWidget* parent)
    : QTableView(parent), document_(document), model_(document) {
  setUp(*this, model_, tr("Tight spots"));
  horizontalHeader()->setSectionResizeMode(2, QHeaderView::Stretch);
  connect(this, &QTableView::clicked, this, [this](const QModelIndex& index) { show(index.row()); });
  connect(selectionModel(), &QItemSelectionModel::currentRowChanged, this, [this](const QModelIndex& index) {
    if (!following_ && index.isValid()) show(index.row());
  });
  connect(&document_, &Document::cursorChanged, this, &SpotTable::follow);
  connect(&model_, &QAbstractItemModel::modelReset, this, &SpotTable::follow);
}

void SpotTable::follow() {
  if (following_) return;
  const int row = document_.cursor() ? model_.rowAt(*document_.cursor()) : -1;
  if (currentIndex().row() == row && row >= 0) return;
  following_ = true;
  if (row < 0) {
    clearSelection();
    setCurrentIndex({});
  } else {
    selectionModel()->setCurrentIndex(model_.index(row, 0),
                                      QItemSelectionModel::ClearAndSelect | QItemSelectionModel::Rows);
  }
  following_ = false;
}

void SpotTable::show(int row) {
  const pipeline::TightSpot* spot = model_.spot(row);
  if (spot == nullptr) return;
  following_ = true;  // two stretches may hold the place; the chosen row stays
  document_.showPlace(spot->s, std::max({spot->s - spot->from, spot->to - spot->s, 0.5}));
  following_ = false;
}

JointPanel::JointPanel(Document& document, QWidget* parent)
    : QWidget(parent), document_(document), model_(document) {
  auto* layout = new QVBoxLayout(this);
  layout->setContentsMargins(0, 0, 0, 0);
  layout->setSpacing(0);
  summary_ = new QLabel(this);
  summary_->setObjectName(QStringLiteral("jointSummary"));
  summary_->setWordWrap(true);
  summary_->setContentsMargins(8, 4, 8, 4);
  layout->addWidget(summary_);
  table_ = new QTableView(this);
  table_->setObjectName(QStringLiteral("joints"));
  setUp(*table_, model_, tr("Joints"));
  table_->horizontalHeader()->setSectionResizeMode(4, QHeaderView::Stretch);
  layout->addWidget(table_, 1);
  connect(table_, &QTableView::clicked, this, [this](const QModelIndex& index) {
    if (const auto s = model_.placeOf(index.row())) document_.showPlace(*s, 1.0);
  });
  connect(&model_, &QAbstractItemModel::modelReset, this, &JointPanel::refresh);
  refresh();
}

void JointPanel::refresh() {
  summary_->setText(document_.isEmpty() ? tr("Open a drawing to see its corners and curvature steps.")
                                        : model_.summary());
}

}  // namespace kf::ui
