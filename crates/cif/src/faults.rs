//! What the messages of the grammar say: the fault, what was expected, how to mend it.

use std::ops::Range;

use values::Diagnostic;

use crate::document::{Document, NO_PARENT, NameRecord};
use crate::number;
use crate::scan::{Form, Inside, Scanner, Span};
use crate::source::shorten;

pub(crate) fn tag_twice(document: &Document, first: NameRecord, again: NameRecord) -> Diagnostic {
    let scanner = Scanner::new(&document.source);
    let at = again.at as usize;
    let (name, line) = (shorten(document.tag(again)), scanner.line(first.at as usize));
    scanner.fault(
        at..scanner.token_end(at),
        format!("the tag `{name}` occurs a second time in its block; first in line {line}"),
        "each tag once in a block",
        "delete one of the two, or begin a new block with data_NAME",
    )
}

pub(crate) fn container_twice(document: &Document, first: u32, again: u32) -> Diagnostic {
    let scanner = Scanner::new(&document.source);
    let heading = |number: u32| document.containers[number as usize].heading as usize;
    let is_block = document.containers[again as usize].parent == NO_PARENT;
    let what = if is_block { "data block" } else { "save frame" };
    let (name, line) = (shorten(document.container_name(again)), scanner.line(heading(first)));
    scanner.fault(
        heading(again)..scanner.token_end(heading(again)),
        format!("the {what} name `{name}` occurs again; it is in line {line} too"),
        "another name",
        format!("rename one; by name only the first {what} is found"),
    )
}

pub(crate) fn before_first_block(scanner: &Scanner<'_>, at: usize) -> Diagnostic {
    let token = at..scanner.token_end(at);
    scanner.fault(
        token.clone(),
        format!("`{}` before the first data block", shorten(scanner.slice(token))),
        "data_NAME before all else but comments",
        "write data_ with a name as the first line, or # before lines that are comments",
    )
}

pub(crate) fn reserved(scanner: &Scanner<'_>, at: usize, end: usize) -> Diagnostic {
    let found = format!("the reserved word `{}`", shorten(scanner.slice(at..end)));
    scanner.fault(at..end, found, "a tag, loop_, save_NAME or data_NAME", "delete it, or quote it if it is a value")
}

/// A value without a tag before it. The value itself may be at fault, which then says more.
pub(crate) fn stray_value(scanner: &Scanner<'_>, at: usize) -> Result<Diagnostic, Diagnostic> {
    let (_, end) = scanner.value(at, Inside::Block)?;
    let token = scanner.slice(at..end);
    let mend = if number::is_lone_su(token) {
        "delete the blank between the number and its s.u. in parentheses"
    } else {
        "put a tag before it, or quote the value before it if the two belong together"
    };
    Ok(scanner.fault(at..end, format!("the value `{}` without a tag", shorten(token)), "a tag before each value", mend))
}

/// A loop without tags or values, or cut short.
pub(crate) fn bad_loop(scanner: &Scanner<'_>, keyword: Range<usize>, names: usize, values: &[Span]) -> Diagnostic {
    if names == 0 {
        return scanner.fault(
            keyword,
            "loop_ without tags",
            "tags behind loop_, then values",
            "delete loop_ or add its tags",
        );
    }
    if values.is_empty() {
        return scanner.fault(
            keyword,
            format!("the loop has {names} tags and no values"),
            format!("values in rows of {names}"),
            "add the values, or delete the loop",
        );
    }
    let split_su = values.iter().find(|v| v.form() == Form::Unquoted && number::is_lone_su(scanner.slice(v.content())));
    let mend = match split_su {
        Some(su) => format!(
            "delete the blank before the s.u. `{}` in line {}",
            shorten(scanner.slice(su.content())),
            scanner.line(su.opening())
        ),
        None => format!(
            "look for a value that is missing, or holds a blank and is not quoted; the last full row ends in line {}",
            scanner.line(values[(values.len() / names * names).saturating_sub(1)].opening())
        ),
    };
    scanner.fault(
        keyword,
        format!("the loop has {names} tags and {} values: {} left over", values.len(), values.len() % names),
        format!("a multiple of {names} values"),
        mend,
    )
}
