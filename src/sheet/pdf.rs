//! Writes a laid-out sheet as a PDF.
//!
//! The bytes depend on the sheet alone (no clock, no random identifier), so that the same sheet printed twice is the
//! same file. Black is device grey: printers put it on paper as solid black.

use krilla::Document;
use krilla::color::luma;
use krilla::geom::{Path, PathBuilder, Point, Rect};
use krilla::metadata::Metadata;
use krilla::page::PageSettings;
use krilla::paint::{Fill, Stroke};
use krilla::surface::Surface;
use krilla::text::{Font, TextDirection};

use super::error::SheetError;
use super::fonts::{BOLD_TTF, REGULAR_TTF};
use super::layout::{Item, LaidOut, Page, Weight};

/// Thickness of a tick box's outline, points.
const TICK_BOX: f32 = 1.1;

/// Writes the sheet as a PDF file with its fonts embedded.
pub fn to_pdf(sheet: &LaidOut) -> Result<Vec<u8>, SheetError> {
    let font = |bytes: &'static [u8], name| Font::new(bytes.into(), 0).ok_or(SheetError::Font(name));
    let fonts = Fonts { regular: font(REGULAR_TTF, "regular")?, bold: font(BOLD_TTF, "bold")? };
    let mut document = Document::new();
    for page in &sheet.pages {
        write_page(&mut document, page, &fonts)?;
    }
    document.set_metadata(
        Metadata::new()
            .title(sheet.title.clone())
            .authors(sheet.author.iter().cloned().collect())
            .creator(sheet.creator.clone())
            .language("en".to_owned()),
    );
    document.finish().map_err(|error| SheetError::Pdf(error.to_string()))
}

struct Fonts {
    regular: Font,
    bold: Font,
}

fn write_page(document: &mut Document, page: &Page, fonts: &Fonts) -> Result<(), SheetError> {
    let (width_pt, height_pt) = (page.width_pt, page.height_pt);
    let settings =
        PageSettings::from_wh(width_pt, height_pt).ok_or(SheetError::PageSize { width_pt, height_pt })?;
    let mut pdf_page = document.start_page_with(settings);
    let mut surface = pdf_page.surface();
    for item in &page.items {
        draw(&mut surface, item, fonts);
    }
    surface.finish();
    pdf_page.finish();
    Ok(())
}

fn draw(surface: &mut Surface<'_>, item: &Item, fonts: &Fonts) {
    match item {
        Item::Text(run) => {
            surface.set_stroke(None);
            surface.set_fill(Some(Fill { paint: luma::Color::black().into(), ..Fill::default() }));
            let font = match run.weight {
                Weight::Regular => &fonts.regular,
                Weight::Bold => &fonts.bold,
            };
            let start = Point::from_xy(run.x, run.baseline);
            surface.draw_text(start, font.clone(), run.size, &run.text, false, TextDirection::LeftToRight);
        }
        Item::Rule(rule) => {
            let mut path = PathBuilder::new();
            path.move_to(rule.x1, rule.y1);
            path.line_to(rule.x2, rule.y2);
            stroke(surface, path.finish(), rule.thickness);
        }
        Item::Frame(frame) => {
            stroke(surface, outline(frame.x, frame.y, frame.width, frame.height), frame.thickness);
        }
        Item::CheckBox(tick) => {
            stroke(surface, outline(tick.x, tick.y, tick.side, tick.side), TICK_BOX);
        }
        Item::WriteIn(_) => {}
    }
}

/// The outline of a rectangle; none if it has no area.
fn outline(x: f32, y: f32, width: f32, height: f32) -> Option<Path> {
    let mut path = PathBuilder::new();
    path.push_rect(Rect::from_xywh(x, y, width, height)?);
    path.finish()
}

fn stroke(surface: &mut Surface<'_>, path: Option<Path>, thickness: f32) {
    let Some(path) = path else { return };
    surface.set_fill(None);
    surface.set_stroke(Some(Stroke {
        paint: luma::Color::black().into(),
        width: thickness,
        ..Stroke::default()
    }));
    surface.draw_path(&path);
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::sheet::sample;
    use crate::sheet::{Paper, lay_out};

    fn pdf() -> Vec<u8> {
        to_pdf(&lay_out(&sample::four_additions(), Paper::A4)).expect("the sample can be written")
    }

    fn contains(bytes: &[u8], text: &str) -> bool {
        bytes.windows(text.len()).any(|window| window == text.as_bytes())
    }

    #[test]
    fn the_file_is_a_pdf_with_title_language_and_embedded_fonts() {
        let bytes = pdf();
        assert!(bytes.starts_with(b"%PDF-"));
        assert!(contains(&bytes, "%%EOF"));
        assert!(contains(&bytes, "/Title"));
        assert!(contains(&bytes, "/Author"));
        assert!(contains(&bytes, "/Lang"));
        assert!(contains(&bytes, "/FontFile2"));
    }

    #[test]
    fn the_same_sheet_gives_the_same_bytes() {
        assert_eq!(pdf(), pdf());
    }

    #[test]
    fn fonts_are_embedded_as_subsets() {
        assert!(pdf().len() < 120_000, "{} bytes", pdf().len());
    }

    #[test]
    fn an_empty_sheet_is_still_a_pdf() {
        let laid_out = lay_out(&crate::sheet::DosingSheet::default(), Paper::Letter);
        assert!(to_pdf(&laid_out).is_ok_and(|bytes| bytes.starts_with(b"%PDF-")));
    }

    /// For looking at: `cargo test -- --ignored writes_the_samples`, then open the folder it prints.
    #[test]
    #[ignore = "writes files to look at"]
    fn writes_the_samples_to_the_temporary_folder() {
        let folder = std::env::temp_dir().join("bathwright-sheets");
        std::fs::create_dir_all(&folder).expect("the temporary folder can be written");
        for (name, sheet) in sample::all() {
            for paper in [Paper::A4, Paper::Letter] {
                let laid_out = lay_out(&sheet, paper);
                let file = folder.join(format!("{name}-{paper:?}"));
                let bytes = to_pdf(&laid_out).expect("the sample can be written");
                std::fs::write(file.with_extension("pdf"), bytes).expect("written");
                std::fs::write(file.with_extension("txt"), crate::sheet::to_text(&laid_out))
                    .expect("written");
            }
            let csv = crate::sheet::to_csv(&sheet).expect("the sample can be written");
            std::fs::write(folder.join(format!("{name}.csv")), csv).expect("written");
        }
        println!("{}", folder.display());
    }
}
