//! Sheet file → `Sheet` and `Outline`, with every mistake printed in place.

use super::options::Options;
use super::{End, Stop, files, screen};
use gapwright::geometry::{self, Outline};
use gapwright::input::{self, Diagnostic, FILE_BYTES_MAX, Sheet};
use std::fs::File;
use std::io::Read;
use std::path::Path;

/// Reads the sheet and the files it names, applies --material and --interval, and lays out the section.
pub fn read(options: &Options) -> Result<(Sheet, Outline), Stop> {
    let path = &options.sheet;
    let name = files::shown(path);
    let text = read_text(path).map_err(|fault| match fault {
        ReadFault::System(reason) => {
            Stop::new(End::InputWrong, format!("{name} could not be read: {reason}"))
        }
        ReadFault::Content(found) => wrong(&[*found], ""),
    })?;
    let home = path.parent().unwrap_or(Path::new(""));
    let fetch = |relative: &str| read_text(&home.join(relative)).map_err(|fault| fault.sentence());
    let mut sheet = input::read(&text, &name, &fetch).map_err(|found| wrong(&found, &text))?;
    for (material, file) in &options.material {
        let shown = files::shown(file);
        let table = read_text(file).map_err(|fault| {
            Stop::new(
                End::InputWrong,
                format!("--material: {shown} could not be read: {}", fault.sentence()),
            )
        })?;
        input::replace_material(&mut sheet, material, &table, &shown)
            .map_err(|found| wrong(&[found], &text))?;
    }
    if let Some(interval) = options.interval {
        sheet.model.accuracy.interval = interval;
    }
    let outline =
        geometry::outline(&sheet.model).map_err(|fault| wrong(&[sheet.diagnose(&fault)], &text))?;
    Ok((sheet, outline))
}

/// Why a file gave no text.
enum ReadFault {
    System(String),
    Content(Box<Diagnostic>),
}

impl ReadFault {
    fn sentence(&self) -> String {
        match self {
            ReadFault::System(reason) => reason.clone(),
            ReadFault::Content(found) => found.message.clone(),
        }
    }
}

/// Text of a file; never holds more than a little above the largest size that is read.
fn read_text(path: &Path) -> Result<String, ReadFault> {
    let system = |e: std::io::Error| ReadFault::System(files::plain(&e));
    let name = files::shown(path);
    if path.is_dir() {
        return Err(ReadFault::System("it is a directory".to_string()));
    }
    let file = File::open(path).map_err(system)?;
    let n_bytes = file.metadata().map_err(system)?.len();
    input::check_size(n_bytes, &name).map_err(|found| ReadFault::Content(Box::new(found)))?;
    let mut bytes = Vec::with_capacity(n_bytes as usize + 1);
    // A device or a pipe has no length: it is cut off one byte above the bound and then refused like a long file.
    file.take(FILE_BYTES_MAX + 1).read_to_end(&mut bytes).map_err(system)?;
    input::check_size(bytes.len() as u64, &name)
        .map_err(|found| ReadFault::Content(Box::new(found)))?;
    input::decode(&bytes, &name).map_err(|found| ReadFault::Content(Box::new(found)))
}

/// Everything that is wrong, rendered one below the other.
fn wrong(found: &[Diagnostic], text: &str) -> Stop {
    let colour = screen::has_colour_for_mistakes();
    let rendered: Vec<String> = found.iter().map(|d| input::render(d, text, colour)).collect();
    Stop { text: rendered.join("\n"), end: End::InputWrong }
}
