//! The HTML page, read back: it is written so that it is XML but for its doctype and void elements.

use figures::{FigureError, Page, PageLink, PagePicture, PageSection, PageTable, report_page};
use roxmltree::Document;

const SVG: &str = "<svg xmlns=\"http://www.w3.org/2000/svg\"><title>t</title></svg>\n";
const NASTY: &str = "<script>alert(1)</script> & \"quoted\" 'name' {{ 7 * 7 }} {% raw %} Åβ\u{0}";

fn cells(cells: &[&str]) -> Vec<String> {
    cells.iter().map(|cell| (*cell).to_owned()).collect()
}

fn section(heading: &str) -> PageSection {
    PageSection {
        heading: heading.to_owned(),
        paragraphs: vec![format!("About {heading}")],
        output: format!("printed {heading}\n  kept"),
        command: Some(format!("latticewright predict {heading}")),
        tables: vec![PageTable {
            caption: format!("Table of {heading}"),
            header: cells(&["hkl", "d / Å"]),
            rows: vec![cells(&["1 1 1", "3.1356(2)"]), cells(&[heading, "−1"])],
        }],
        pictures: vec![PagePicture { svg: SVG.to_owned(), caption: format!("Picture of {heading}") }],
        links: vec![PageLink { text: heading.to_owned(), href: "predict/lines.csv".to_owned() }],
    }
}

fn page(headings: &[&str]) -> Page {
    Page {
        title: format!("Page of {}", headings[0]),
        lead: vec![headings[0].to_owned()],
        sections: headings.iter().map(|heading| section(heading)).collect(),
        footer: headings[0].to_owned(),
    }
}

/// The page with void elements closed, as XML.
fn as_xml(html: &str) -> String {
    let body = html.strip_prefix("<!DOCTYPE html>\n").expect("a doctype");
    body.lines()
        .map(
            |line| {
                if line.starts_with("<meta ") { line.trim_end_matches('>').to_owned() + "/>" } else { line.to_owned() }
            },
        )
        .collect::<Vec<_>>()
        .join("\n")
}

#[test]
fn text_that_looks_like_markup_or_template_is_shown_as_text() {
    let html = report_page(&page(&[NASTY])).expect("a page");
    assert!(!html.contains("<script"), "markup got through");
    assert!(html.contains("&lt;script&gt;alert(1)&lt;&#x2f;script&gt; &amp; &quot;quoted&quot;"), "{html}");
    let xml = as_xml(&html);
    let document = Document::parse(&xml).expect("well-formed");
    let shown = NASTY.replace('\0', "\u{fffd}");
    let text_of = |tag: &str| document.descendants().find(|node| node.has_tag_name(tag)).and_then(|node| node.text());
    assert_eq!(text_of("h2"), Some(shown.as_str()));
    assert_eq!(text_of("code"), Some(format!("latticewright predict {shown}").as_str()));
    assert_eq!(text_of("samp"), Some(format!("printed {shown}\n  kept").as_str()));
    let cell = document.descendants().filter(|node| node.has_tag_name("td")).nth(2).and_then(|node| node.text());
    assert_eq!(cell, Some(shown.as_str()));
}

#[test]
fn the_page_needs_nothing_from_elsewhere() {
    let html = report_page(&page(&["a", "b", "c"])).expect("a page");
    let without_namespaces = html.replace("xmlns=\"http://www.w3.org/2000/svg\"", "");
    for outside in ["http:", "https:", "//", "<script", "<link", "@import", "url(", "<img", "<iframe"] {
        assert!(!without_namespaces.contains(outside), "{outside}");
    }
    assert!(!html.contains('\r') && html.ends_with("</html>\n"));
    assert!(html.contains("prefers-color-scheme:dark") && html.contains("@media print"));
}

#[test]
fn headings_language_captions_and_targets_are_in_order() {
    let html = report_page(&page(&["one", "two", "three"])).expect("a page");
    let xml = as_xml(&html);
    let document = Document::parse(&xml).expect("well-formed");
    assert_eq!(document.root_element().attribute("lang"), Some("en"));
    let count = |tag: &str| document.descendants().filter(|node| node.tag_name().name() == tag).count();
    assert_eq!([count("h1"), count("h2"), count("caption"), count("figcaption"), count("main")], [1, 3, 3, 3, 1]);
    let ids: Vec<&str> = document.descendants().filter_map(|node| node.attribute("id")).collect();
    let targets: Vec<&str> = document
        .descendants()
        .filter_map(|node| node.attribute("href"))
        .filter_map(|href| href.strip_prefix('#'))
        .collect();
    assert_eq!(ids, targets);
    let headers = document.descendants().filter(|node| node.has_tag_name("th"));
    assert!(headers.into_iter().all(|node| node.attribute("scope") == Some("col")));
}

#[test]
fn columns_of_numbers_are_set_flush_right_and_others_not() {
    let html = report_page(&page(&["one"])).expect("a page");
    assert!(html.contains("<th scope=\"col\">hkl</th><th scope=\"col\" class=\"n\">d"), "{html}");
    assert!(html.contains("<td class=\"n\">−1</td>"));
}

#[test]
fn links_that_leave_the_folder_are_refused() {
    let bad =
        ["javascript:alert(1)", "http://x", "/etc/passwd", "../up", "a/../../b", "", "a//b", "c:\\x", "a\nb", "x\"y"];
    for href in bad {
        let mut page = page(&["one"]);
        page.sections[0].links[0].href = href.to_owned();
        assert_eq!(report_page(&page), Err(FigureError::Link { href: href.to_owned() }));
    }
}

#[test]
fn pictures_that_are_not_plain_svg_are_refused() {
    let bad = [
        "",
        "<p>no</p>",
        "<svg xmlns=\"http://www.w3.org/2000/svg\"><script/></svg>",
        "<svg xmlns=\"http://www.w3.org/2000/svg\"><a href=\"x\"/></svg>",
        "<svg xmlns=\"http://www.w3.org/2000/svg\" onload=\"x\"></svg>",
        "<svg xmlns=\"http://www.w3.org/2000/svg\"></svg><b></b>",
    ];
    for svg in bad {
        let mut page = page(&["one"]);
        page.sections[0].pictures[0].svg = svg.to_owned();
        assert_eq!(report_page(&page), Err(FigureError::NotSvg { section: 0 }), "{svg}");
    }
}

#[test]
fn a_row_of_another_length_is_refused() {
    let mut page = page(&["one"]);
    page.sections[0].tables[0].rows[1].pop();
    assert!(matches!(report_page(&page), Err(FigureError::Lengths { expected: 2, found: 1, .. })));
}

#[test]
fn an_empty_page_and_the_same_page_twice_are_fine() {
    let empty = Page { title: "t".to_owned(), ..Page::default() };
    let html = report_page(&empty).expect("a page");
    Document::parse(&as_xml(&html)).expect("well-formed");
    assert_eq!(report_page(&page(&["x"])), report_page(&page(&["x"])));
}
