//! One HTML page that shows results offline: sections of text, commands, tables, pictures and links.
//!
//! The page is one file without scripts and without anything from the network; colours follow the reader's light or dark
//! setting, and a print style keeps tables and pictures whole. All text is escaped by the template engine; pictures are SVG
//! of this crate and stand in the page as they are.

use minijinja::syntax::SyntaxConfig;
use minijinja::{AutoEscape, Environment, Value, context};

use crate::error::FigureError;

/// A table of the page.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct PageTable {
    /// What the table shows; may be empty.
    pub caption: String,
    /// Names of the columns, with units.
    pub header: Vec<String>,
    /// Rows, each as long as the header. A column whose entries all begin like numbers is set flush right.
    pub rows: Vec<Vec<String>>,
}

/// A picture of the page.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct PagePicture {
    /// SVG text of this crate.
    pub svg: String,
    /// Caption below it; may be empty.
    pub caption: String,
}

/// A link to a file beside the page.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct PageLink {
    /// What is shown.
    pub text: String,
    /// Relative path with `/` between its parts.
    pub href: String,
}

/// A section of the page. Empty parts are left out.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct PageSection {
    /// Heading.
    pub heading: String,
    /// Paragraphs of plain text.
    pub paragraphs: Vec<String>,
    /// The command that the section stands for.
    pub command: Option<String>,
    /// What the command printed, with its line ends and blanks.
    pub output: String,
    /// Tables.
    pub tables: Vec<PageTable>,
    /// Pictures.
    pub pictures: Vec<PagePicture>,
    /// Links to files beside the page.
    pub links: Vec<PageLink>,
}

/// A page.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Page {
    /// Title, also the first heading.
    pub title: String,
    /// Paragraphs below the title.
    pub lead: Vec<String>,
    /// Sections in order.
    pub sections: Vec<PageSection>,
    /// Last line of the page; may be empty.
    pub footer: String,
}

const TEMPLATE: &str = include_str!("page.html.j2");

/// Writes the page as HTML text, UTF-8 with LF.
///
/// # Errors
/// [`FigureError::Link`] for a link that is not a plain relative path, [`FigureError::NotSvg`] for a picture that does not
/// begin with `<svg` or holds a script, an event handler or a reference to elsewhere, [`FigureError::Lengths`] for a row
/// that is not as long as its header.
pub fn report_page(page: &Page) -> Result<String, FigureError> {
    for (index, section) in page.sections.iter().enumerate() {
        check(index, section)?;
    }
    let mut environment = Environment::new();
    environment.set_auto_escape_callback(|_| AutoEscape::Html);
    let syntax = SyntaxConfig::builder().trim_blocks(true).lstrip_blocks(true).keep_trailing_newline(true).build();
    environment.set_syntax(syntax.map_err(|error| FigureError::Internal(error.to_string()))?);
    let sections: Vec<Value> = page.sections.iter().enumerate().map(section).collect();
    let contents = page.sections.len() > 2;
    let values = context! {
        title => clean(&page.title),
        lead => cleaned(&page.lead),
        footer => clean(&page.footer),
        contents,
        sections,
    };
    environment.render_str(TEMPLATE, values).map_err(|error| FigureError::Internal(error.to_string()))
}

fn check(index: usize, section: &PageSection) -> Result<(), FigureError> {
    if let Some(link) = section.links.iter().find(|link| !is_plain_relative(&link.href)) {
        return Err(FigureError::Link { href: link.href.clone() });
    }
    if section.pictures.iter().any(|picture| !is_plain_svg(&picture.svg)) {
        return Err(FigureError::NotSvg { section: index });
    }
    for table in &section.tables {
        for row in &table.rows {
            crate::error::same_length("a row of a table", table.header.len(), row.len())?;
        }
    }
    Ok(())
}

/// A path that stays in the folder of the page: no scheme, no root, no step upwards, no query.
fn is_plain_relative(href: &str) -> bool {
    let part = |part: &str| !part.is_empty() && part != "." && part != "..";
    !href.contains([':', '\\', '?', '#', '%', '"', '<', '>'])
        && !href.contains(char::is_control)
        && href.split('/').all(part)
}

fn is_plain_svg(svg: &str) -> bool {
    let lower = svg.to_ascii_lowercase();
    let forbidden = ["<script", "javascript:", "<foreignobject", "<iframe", "href=", "url(", " onload", " onclick"];
    svg.starts_with("<svg ") && svg.trim_end().ends_with("</svg>") && !forbidden.iter().any(|bad| lower.contains(bad))
}

/// Text without characters that HTML does not allow.
fn clean(text: &str) -> String {
    let allowed = |c: char| matches!(c, '\n' | '\t') || !c.is_control();
    text.chars().map(|c| if allowed(c) { c } else { '\u{fffd}' }).collect()
}

fn cleaned(texts: &[String]) -> Vec<Value> {
    texts.iter().map(|text| Value::from(clean(text))).collect()
}

fn section((index, section): (usize, &PageSection)) -> Value {
    let tables: Vec<Value> = section.tables.iter().map(table).collect();
    let picture = |picture: &PagePicture| {
        context! { svg => Value::from_safe_string(picture.svg.clone()), caption => clean(&picture.caption) }
    };
    let pictures: Vec<Value> = section.pictures.iter().map(picture).collect();
    let link = |link: &PageLink| context! { text => clean(&link.text), href => link.href.clone() };
    let links: Vec<Value> = section.links.iter().map(link).collect();
    context! {
        id => format!("section-{}", index + 1),
        heading => clean(&section.heading),
        paragraphs => cleaned(&section.paragraphs),
        command => section.command.as_deref().map(clean).unwrap_or_default(),
        output => clean(&section.output),
        tables,
        pictures,
        links,
    }
}

fn table(table: &PageTable) -> Value {
    let numeric: Vec<bool> = (0..table.header.len())
        .map(|column| !table.rows.is_empty() && table.rows.iter().all(|row| begins_like_number(&row[column])))
        .collect();
    let cells = |cells: &Vec<String>| {
        let cell = |(text, numeric): (&String, &bool)| context! { text => clean(text), numeric => *numeric };
        cells.iter().zip(&numeric).map(cell).collect::<Vec<Value>>()
    };
    let rows: Vec<Value> = table.rows.iter().map(|row| Value::from(cells(row))).collect();
    context! { caption => clean(&table.caption), header => cells(&table.header), rows }
}

/// An empty entry or a dash is a missing number.
fn begins_like_number(text: &str) -> bool {
    let text = text.trim();
    matches!(text, "" | "–" | "—" | "-")
        || (text.trim_start_matches(['+', '-', '−', '±', '<', '>', ' ']).starts_with(|c: char| c.is_ascii_digit())
            && !text.contains(char::is_alphabetic))
}
