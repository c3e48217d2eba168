// Loading shapes, and the drawing that they make.
// Lengths in mm.
#include "app/brep_reader/load.h"

#include <IGESBasic_Group.hxx>
#include <IGESControl_Reader.hxx>
#include <IGESData_IGESEntity.hxx>
#include <IGESData_IGESModel.hxx>
#include <Interface_CheckIterator.hxx>
#include <Interface_Static.hxx>
#include <Message.hxx>
#include <Message_Messenger.hxx>
#include <Message_Printer.hxx>
#include <STEPControl_Reader.hxx>
#include <Standard_Failure.hxx>
#include <StepGeom_Curve.hxx>
#include <StepShape_EdgeCurve.hxx>
#include <StepShape_GeometricSet.hxx>
#include <StepShape_GeometricSetSelect.hxx>
#include <TColStd_SequenceOfAsciiString.hxx>
#include <TopExp.hxx>
#include <TopTools_IndexedMapOfShape.hxx>
#include <TopTools_MapOfShape.hxx>
#include <XSControl_TransferReader.hxx>
#include <XSControl_WorkSession.hxx>

#include <array>
#include <exception>
#include <set>
#include <utility>

#include <fmt/format.h>

#include "app/brep_reader/edges.h"
#include "core/read/text.h"

namespace kf::brep {
namespace {

constexpr int kDeepestGroup = 16;

Error damaged(std::string what) {
  return {ErrorCode::cannotRead, std::move(what)};
}

// The first failure among the checks, with the number of its entity.
Result<void> checked(const Interface_CheckIterator& found) {
  std::size_t failures = 0;
  std::string first;
  Interface_CheckIterator checks = found;
  for (checks.Start(); checks.More(); checks.Next()) {
    const Handle(Interface_Check)& check = checks.Value();
    if (!check->HasFailed()) continue;
    if (failures++ == 0) {
      std::string text = check->CFail(1);
      first = fmt::format("entity {}: {}", checks.Number(), text.substr(0, 200));
    }
  }
  if (failures == 0) return {};
  return damaged(fmt::format("{} of its entities are not as its own format wants them ({}); export it again",
                             failures, first));
}

// Edges that differ in more than their place.
std::size_t differentEdges(const std::vector<LoadedShape>& shapes) {
  TopTools_MapOfShape different;
  for (const LoadedShape& one : shapes) {
    TopTools_IndexedMapOfShape map;
    TopExp::MapShapes(one.shape, TopAbs_EDGE, map);
    for (int i = 1; i <= map.Extent(); ++i) different.Add(map(i).Located(TopLoc_Location()));
  }
  return static_cast<std::size_t>(different.Extent());
}

// What a STEP model holds that must come out as edges: edge curves, and the curves of geometric sets.
std::size_t edgesInStep(const Handle(Interface_InterfaceModel) & model) {
  std::size_t edges = 0;
  for (int i = 1; i <= model->NbEntities(); ++i) {
    const Handle(Standard_Transient)& entity = model->Value(i);
    if (entity->IsKind(STANDARD_TYPE(StepShape_EdgeCurve))) ++edges;
    const auto set = Handle(StepShape_GeometricSet)::DownCast(entity);
    if (set.IsNull()) continue;
    for (int j = 1; j <= set->NbElements(); ++j) {
      if (!set->ElementsValue(j).Curve().IsNull()) ++edges;
    }
  }
  return edges;
}

std::string unitOf(STEPControl_Reader& reader) {
  TColStd_SequenceOfAsciiString lengths, angles, solidAngles;
  reader.FileUnits(lengths, angles, solidAngles);
  if (lengths.IsEmpty()) return {};
  std::string unit = lengths.First().ToCString();
  for (char& c : unit) c = static_cast<char>(c >= 'A' && c <= 'Z' ? c + 32 : c);
  return unit == "millimetre" || unit == "mm" ? std::string() : unit;
}

Result<Loaded> loadStep(const std::string& path) {
  STEPControl_Reader reader;
  if (reader.ReadFile(path.c_str()) != IFSelect_RetDone)
    return damaged("it can't be parsed as STEP; export it again");
  if (auto good = checked(reader.WS()->ModelCheckList(Standard_True)); !good) return good.error();
  Loaded loaded;
  loaded.unit = unitOf(reader);
  const int roots = reader.NbRootsForTransfer();
  int failed = 0;
  for (int i = 1; i <= roots; ++i) {
    if (!reader.TransferRoot(i)) ++failed;
  }
  for (int i = 1; i <= reader.NbShapes(); ++i) loaded.shapes.push_back({reader.Shape(i), ""});
  const std::size_t wanted = edgesInStep(reader.Model()), got = differentEdges(loaded.shapes);
  if (got < wanted) {
    return damaged(
        fmt::format("only {} of its {} edges could be made ({} of {} shapes failed); export it again", got,
                    wanted, failed, roots));
  }
  if (got == 0) return Error{ErrorCode::unsupported, "it holds no edge or curve"};
  return loaded;
}

// Annotation and structure (types 2xx and 4xx) and points never were curves; an instance of a subfigure (408)
// may be. Source: the type numbers of IGES 5.3.
bool isGeometry(const Handle(IGESData_IGESEntity) & entity) {
  const int type = entity->TypeNumber(), form = entity->FormNumber();
  if (type == 106) return form < 20 || form > 40;  // the others are centre lines, sections, witness lines
  return (type >= 100 && type < 200 && type != 116 && type != 125 && type != 132) || type == 408;
}
// A transformation or a definition (colour, font, subfigure) does nothing by itself.
bool isAuxiliary(int type) {
  return type == 0 || type == 124 || (type >= 300 && type < 400);
}

std::size_t edgeCount(const TopoDS_Shape& shape) {
  TopTools_IndexedMapOfShape map;
  TopExp::MapShapes(shape, TopAbs_EDGE, map);
  return static_cast<std::size_t>(map.Extent());
}

Result<void> takeParts(IGESControl_Reader& reader, const Handle(IGESBasic_Group) & group, Loaded& loaded,
                       int depth);

// Whether it is part of another entity (physically dependent).
bool isPart(const Handle(IGESData_IGESEntity) & entity) {
  return entity->SubordinateStatus() == 1 || entity->SubordinateStatus() == 3;
}

// One entity of an IGES file that stands for itself.
Result<void> takeRoot(IGESControl_Reader& reader, const Handle(IGESData_IGESEntity) & entity, Loaded& loaded,
                      int depth) {
  const int type = entity->TypeNumber();
  const std::string kind = fmt::format("IGES {}", type);
  const int number = reader.Model()->Number(entity);
  const std::string place = fmt::format("entity {} (D{})", number, 2 * number - 1);
  if (entity->BlankStatus() == 1) {
    read::note(loaded.ignored, kind, "is not shown (blank status)", place);
    return {};
  }
  if (isAuxiliary(type)) return {};
  if (const auto group = Handle(IGESBasic_Group)::DownCast(entity); !group.IsNull())
    return takeParts(reader, group, loaded, depth);
  if (!isGeometry(entity)) {
    read::note(loaded.ignored, kind, "annotation or structure has no contour", place);
    return {};
  }
  const int before = reader.NbShapes();
  if (!reader.TransferEntity(entity) || reader.NbShapes() == before)
    return damaged(fmt::format("{}, type {}, could not be made; export it again", place, type));
  const TopoDS_Shape shape = reader.Shape(reader.NbShapes());
  if (edgeCount(shape) == 0) {
    return damaged(fmt::format("{}, type {}, came out without any edge; export it again", place, type));
  }
  loaded.shapes.push_back({shape, entity->Level() > 0 ? fmt::format("level {}", entity->Level()) : ""});
  return {};
}

// Of a group's members only those that do not also stand for themselves.
Result<void> takeParts(IGESControl_Reader& reader, const Handle(IGESBasic_Group) & group, Loaded& loaded,
                       int depth) {
  if (depth == kDeepestGroup)
    return damaged(fmt::format("its groups are nested more than {} deep", kDeepestGroup));
  for (int i = 1; i <= group->NbEntities(); ++i) {
    const Handle(IGESData_IGESEntity) member = group->Entity(i);
    if (member.IsNull() || !isPart(member)) continue;
    if (auto taken = takeRoot(reader, member, loaded, depth + 1); !taken) return taken;
  }
  return {};
}

// Unit flags of the global section. Source: IGES 5.3, 2.2.4.3.14.
std::string igesUnit(const IGESData_GlobalSection& global) {
  constexpr std::array<const char*, 12> kNames = {"",  "in", "",    "",           "ft", "mi",
                                                  "m", "km", "mil", "micrometre", "cm", "microinch"};
  const int flag = global.UnitFlag();
  return flag >= 0 && flag < 12 ? kNames[static_cast<std::size_t>(flag)] : "";
}

Result<Loaded> loadIges(const std::string& path) {
  IGESControl_Reader reader;
  if (reader.ReadFile(path.c_str()) != IFSelect_RetDone)
    return damaged("it can't be parsed as IGES; export it again");
  const auto model = Handle(IGESData_IGESModel)::DownCast(reader.Model());
  if (model.IsNull()) return damaged("it can't be parsed as IGES; export it again");
  if (auto good = checked(reader.WS()->ModelCheckList(Standard_True)); !good) return good.error();
  Loaded loaded;
  loaded.unit = igesUnit(model->GlobalSection());
  for (int i = 1; i <= model->NbEntities(); ++i) {
    const Handle(IGESData_IGESEntity) entity = model->Entity(i);
    if (isPart(entity)) continue;
    if (auto taken = takeRoot(reader, entity, loaded, 0); !taken) return taken.error();
  }
  if (loaded.shapes.empty()) return Error{ErrorCode::unsupported, "it holds no edge or curve"};
  return loaded;
}

Result<read::Drawing> flattenAll(Loaded& loaded) {
  read::Drawing drawing;
  std::vector<SpaceCurve> curves;
  std::vector<std::pair<std::string, std::string>> names;
  std::size_t number = 0;
  for (const LoadedShape& one : loaded.shapes) {
    for (const TopoDS_Edge& edge : edgesOf(one.shape)) {
      const std::string place = fmt::format("edge {}", ++number);
      auto made = spaceCurveOf(edge);
      if (!made && made.error().code != ErrorCode::unsupported)
        return damaged(fmt::format("{}: {}; export it again", place, made.error().message));
      if (!made) {
        read::note(loaded.skipped, "edge", made.error().message, place);
        continue;
      }
      curves.push_back(*std::move(made));
      names.emplace_back(one.layer, place);
    }
  }
  if (curves.empty() && loaded.skipped.empty())
    return Error{ErrorCode::unsupported, "it holds no edge or curve"};
  if (!curves.empty()) {
    const Plane plane = planeOf(curves);
    if (!(plane.deviation <= kFlat)) {
      return Error{
          ErrorCode::unsupported,
          fmt::format("it is not flat: its {} edges lie up to {:.6g} mm off the plane {}; export one "
                      "flat face or sketch",
                      curves.size(), plane.deviation, plane.text)};
    }
    drawing.warnings.push_back(
        fmt::format("flat in the plane {}, to {:.2g} mm", plane.text, plane.deviation));
    std::set<std::string> layers;
    for (std::size_t i = 0; i < curves.size(); ++i) {
      auto made = flattened(curves[i], plane);
      if (!made)
        return damaged(fmt::format("{}: {}; export it again", names[i].second, made.error().message));
      const std::string& layer = names[i].first;
      if (!layer.empty() && layers.insert(layer).second) drawing.layers.push_back(layer);
      drawing.curves.push_back({*std::move(made), layer, names[i].second});
    }
  }
  return drawing;
}

}  // namespace

Result<Loaded> load(const std::string& path, Format format) {
  try {
    Message::DefaultMessenger()->RemovePrinters(STANDARD_TYPE(Message_Printer));
    return format == Format::step ? loadStep(path) : loadIges(path);
  } catch (const Standard_Failure& failure) {
    return damaged(
        fmt::format("the reading library gave up ({}); export it again", failure.DynamicType()->Name()));
  } catch (const std::exception& failure) {
    return damaged(fmt::format("the reading library gave up ({}); export it again", failure.what()));
  }
}

Result<read::Drawing> drawingOf(const std::string& path, Format format) {
  auto loaded = load(path, format);
  if (!loaded) return loaded.error();
  try {
    auto drawing = flattenAll(*loaded);
    if (!drawing) return drawing;
    drawing->format = format == Format::step ? "STEP" : "IGES";
    drawing->skipped = std::move(loaded->skipped);
    drawing->ignored = std::move(loaded->ignored);
    drawing->unitName = "mm";
    drawing->millimetresPerUnit = 1.0;
    if (!loaded->unit.empty())
      drawing->warnings.push_back(fmt::format("its own unit, {}, was turned into mm", loaded->unit));
    return drawing;
  } catch (const Standard_Failure& failure) {
    return damaged(
        fmt::format("the reading library gave up ({}); export it again", failure.DynamicType()->Name()));
  } catch (const std::exception& failure) {
    return damaged(fmt::format("the reading library gave up ({}); export it again", failure.what()));
  }
}

}  // namespace kf::brep
