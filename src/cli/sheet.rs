//! `widefront sheet`: the hand-off of one design to layout.

use super::{Failure, print};
use crate::evaluate::Setup;
use crate::run::folder::{RunFolder, read_cell, read_front, read_run};
use crate::run::records::DesignRecord;
use crate::run::variant::variant_of_cell;
use crate::sheet::{Sheet, SheetError, csv, drawing, markdown, sheet};
use crate::study::nearest;
use std::path::{Path, PathBuf};

#[derive(Debug, clap::Args)]
pub struct SheetArguments {
    /// The run folder.
    run: PathBuf,
    /// Id of the design, as `pick` prints it.
    design: String,
}

impl From<SheetError> for Failure {
    fn from(error: SheetError) -> Self {
        match error {
            SheetError::NoRules { .. } => Self::Input(error.to_string()),
            _ => Self::Run(error.to_string()),
        }
    }
}

/// Makes and writes the sheet.
pub fn run(arguments: &SheetArguments) -> Result<(), Failure> {
    read_run(&arguments.run)?;
    let record = design(&arguments.run, &arguments.design)?;
    let (study, technology) = variant_of_cell(&arguments.run, record.cell)?;
    let setup = Setup::new(&study, &technology).map_err(|e| Failure::Run(e.to_string()))?;
    let sheet = sheet(&study, &technology, &setup, &record)?;
    write(&arguments.run, &sheet)?;
    print(&summary(&arguments.run, &sheet))
}

/// A design of the front of the cell that its id begins with: cells' files carry a digest, the overall front has none.
fn design(path: &Path, id: &str) -> Result<DesignRecord, Failure> {
    let cell = id.split_once('-').and_then(|(cell, _)| cell.parse().ok());
    if let Some(cell) = cell
        && let Some(record) = read_cell(path, cell)?
        && let Some(found) = record.designs.into_iter().find(|d| d.id == id)
    {
        return Ok(found);
    }
    let front = read_front(path)?.designs;
    let help = nearest(id, front.iter().map(|d| d.id.as_str())).map_or(String::new(), |n| {
        format!("\n  help: did you mean \"{n}\"?")
    });
    Err(Failure::Input(format!(
        "read the design \"{id}\", which is not in {}; allowed: an id that `widefront pick` prints{help}",
        path.display()
    )))
}

fn write(path: &Path, sheet: &Sheet) -> Result<(), Failure> {
    let folder = RunFolder::open(path)?;
    let room = path.join("sheets");
    std::fs::create_dir_all(&room).map_err(|e| Failure::Run(format!("{}: {e}", room.display())))?;
    let name = |end: &str| format!("sheets/{}.{end}", sheet.id);
    let table = csv(sheet).map_err(|e| Failure::Run(format!("writing CSV: {e}")))?;
    folder.write(
        &name("md"),
        markdown(sheet, &format!("{}.svg", sheet.id)).as_bytes(),
    )?;
    folder.write(&name("csv"), &table)?;
    folder.write_json(&name("json"), sheet)?;
    folder.write(&name("svg"), drawing(sheet).as_bytes())?;
    Ok(())
}

fn summary(path: &Path, sheet: &Sheet) -> String {
    let mut text = format!(
        "wrote {}.md, .csv, .json and .svg\n",
        path.join("sheets").join(&sheet.id).display(),
    );
    for caution in &sheet.cautions {
        text += &format!("caution: {caution}\n");
    }
    text
}
