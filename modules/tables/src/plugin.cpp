#include "wavefount/core/plugin.h"

#include "wavefount/core/observations.h"
#include "wavefount/tables/csv_writer.h"
#include "wavefount/tables/gather.h"
#include "wavefount/tables/table_source.h"
#include "wavefount/tables/workbook.h"

namespace wavefount {
namespace {

class WriteTables final : public AcquisitionStep {
 public:
  using Self = WriteTables;
  using Pointer = itk::SmartPointer<Self>;
  itkFactorylessNewMacro(Self);
  itkTypeMacro(WriteTables, AcquisitionStep);

  StepDeclaration declaration() const override {
    return {"write-tables",
            "Writes the tables of one acquisition as CSV files.",
            Scope::acquisition,
            {FilmDescription::record_name, Observations::record_name},
            {},
            {}};
  }

  void process(AcquisitionWork& work) const override {
    const AcquisitionView view{*work.records, work.name, *work.messages};
    for (const auto& table : all_tables(view))
      write_csv(table, work.output / (table.name + ".csv"));
  }
};

class GatherTables final : public FolderStep {
 public:
  using Self = GatherTables;
  using Pointer = itk::SmartPointer<Self>;
  itkFactorylessNewMacro(Self);
  itkTypeMacro(GatherTables, FolderStep);

  StepDeclaration declaration() const override {
    return {"gather-tables",
            "Joins the tables of all acquisitions into one CSV file a table.",
            Scope::folder,
            {},
            {},
            {}};
  }

  void process(FolderWork& work) const override { gather_tables(work); }
};

class WriteWorkbook final : public FolderStep {
 public:
  using Self = WriteWorkbook;
  using Pointer = itk::SmartPointer<Self>;
  itkFactorylessNewMacro(Self);
  itkTypeMacro(WriteWorkbook, FolderStep);

  StepDeclaration declaration() const override {
    return {"write-workbook",
            "Writes workbook.xlsx from the joined tables: what was found, the tables, what their "
            "columns mean.",
            Scope::folder,
            {},
            {},
            {}};
  }

  void process(FolderWork& work) const override { write_workbook(work.output, work.messages); }
};

}  // namespace
}  // namespace wavefount

WAVEFOUNT_PLUGIN("Tables: CSV files and the workbook.", wavefount::WriteTables,
                 wavefount::GatherTables, wavefount::WriteWorkbook)
