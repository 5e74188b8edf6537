//! What can go wrong when a sheet is written. Laying out cannot fail; only the file formats can.

use thiserror::Error;

/// Why a sheet could not be written.
#[derive(Debug, Error)]
pub enum SheetError {
    /// One of the two embedded fonts is damaged (only possible in a broken build).
    #[error("the built-in {0} font cannot be read, so no PDF can be written")]
    Font(&'static str),
    /// The page size is not one a PDF page can have.
    #[error("a page of {width_pt} × {height_pt} points cannot be written to a PDF")]
    PageSize {
        /// Page width in points.
        width_pt: f32,
        /// Page height in points.
        height_pt: f32,
    },
    /// The PDF writer refused the document.
    #[error("the PDF could not be finished: {0}")]
    Pdf(String),
    /// The CSV writer failed.
    #[error("the CSV table could not be written")]
    Csv(#[from] ::csv::Error),
    /// The CSV writer could not hand back its buffer.
    #[error("the CSV table could not be finished: {0}")]
    CsvBuffer(String),
}
