//! Pictures as SVG, and the HTML page that shows them
//!
//! | question | picture |
//! | --- | --- |
//! | what will I see? | [`predicted_pattern`] |
//! | which lattice? | [`indexed_lines`] |
//! | has it moved? | [`drift_chart`] |
//! | all of it, offline | [`report_page`] |
//!
//! In: plain structs of labels, slices of numbers and [`values::Measured`]; units stand in the names. Out: SVG text, UTF-8
//! with LF, the same bytes for the same input. A number that can't be drawn is refused with a [`FigureError`].
//!
//! Inside, from below: `widths` (how wide a text is) → `ticks`, `labels`, `thin` (where things go) → `palette`, `svg` (how
//! they are written) → `panel` (axes and curves, through plotters) → `layout` (headings, legends) → one module for each
//! picture. Nothing here opens a file.

mod drift;
mod error;
mod hkl;
mod indexed;
mod labels;
mod layout;
mod page;
mod palette;
mod panel;
mod pattern;
mod skyline;
mod svg;
mod thin;
mod ticks;
mod widths;

pub use drift::{DriftDecision, DriftFigure, DriftPoint, DriftUnit, MAX_BATCHES, drift_chart};
pub use error::FigureError;
pub use indexed::{
    CalculatedLine, CellParameter, IndexedFigure, LineKind, MAX_CALCULATED, MAX_OBSERVED, Merit, ObservedLine,
    indexed_lines,
};
pub use page::{Page, PageLink, PagePicture, PageSection, PageTable, report_page};
pub use pattern::{MAX_PHASES, MAX_POINTS, PatternFigure, PhaseCurve, ReflectionMark, predicted_pattern};
