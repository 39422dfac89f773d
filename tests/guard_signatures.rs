//! Guard: no type of a dependency stands in a signature between crates, so that versions of dependencies stay private.

#![allow(clippy::unwrap_used, reason = "a guard may stop where it can't read")]

use std::collections::BTreeSet;
use std::path::{Path, PathBuf};

use syn::visit::Visit;

/// Dependencies whose names may never appear in public signatures.
const PRIVATE: [&str; 14] = [
    "nalgebra",
    "ndarray",
    "moyo",
    "plotters",
    "minijinja",
    "toml",
    "serde_json",
    "statrs",
    "rayon",
    "clap",
    "comfy_table",
    "tempfile",
    "pulp",
    "csv",
];

#[derive(Default)]
struct Signatures {
    imported: BTreeSet<String>,
    /// Types of this file that no other crate can name: their methods are no signatures between crates.
    hidden: BTreeSet<String>,
    found: Vec<String>,
    public: bool,
}

impl Signatures {
    fn import(&mut self, tree: &syn::UseTree, foreign: bool) {
        match tree {
            syn::UseTree::Path(path) => {
                let foreign = foreign || PRIVATE.contains(&path.ident.to_string().as_str());
                self.import(&path.tree, foreign);
            }
            syn::UseTree::Name(name) if foreign => {
                self.imported.insert(name.ident.to_string());
            }
            syn::UseTree::Rename(rename) if foreign => {
                self.imported.insert(rename.rename.to_string());
            }
            syn::UseTree::Group(group) => group.items.iter().for_each(|item| self.import(item, foreign)),
            _ => {}
        }
    }

    fn when_public(&mut self, visibility: &syn::Visibility, look: impl FnOnce(&mut Self)) {
        if matches!(visibility, syn::Visibility::Public(_)) {
            self.public = true;
            look(self);
            self.public = false;
        }
    }
}

impl<'ast> Visit<'ast> for Signatures {
    fn visit_item_use(&mut self, item: &'ast syn::ItemUse) {
        self.import(&item.tree, false);
        if matches!(item.vis, syn::Visibility::Public(_))
            && let syn::UseTree::Path(path) = &item.tree
            && PRIVATE.contains(&path.ident.to_string().as_str())
        {
            self.found.push(format!("pub use {}", path.ident));
        }
    }

    fn visit_item_mod(&mut self, item: &'ast syn::ItemMod) {
        let test = item.attrs.iter().any(|a| a.path().is_ident("cfg"));
        if !test {
            syn::visit::visit_item_mod(self, item);
        }
    }

    fn visit_item_impl(&mut self, item: &'ast syn::ItemImpl) {
        if let syn::Type::Path(path) = &*item.self_ty
            && path.path.segments.last().is_some_and(|s| self.hidden.contains(&s.ident.to_string()))
        {
            return;
        }
        syn::visit::visit_item_impl(self, item);
    }

    fn visit_path(&mut self, path: &'ast syn::Path) {
        if self.public {
            let first = path.segments.first().map(|s| s.ident.to_string()).unwrap_or_default();
            if PRIVATE.contains(&first.as_str()) || self.imported.contains(&first) {
                self.found.push(path.segments.iter().map(|s| s.ident.to_string()).collect::<Vec<_>>().join("::"));
            }
        }
        syn::visit::visit_path(self, path);
    }

    fn visit_item_fn(&mut self, item: &'ast syn::ItemFn) {
        self.when_public(&item.vis, |this| this.visit_signature(&item.sig));
    }

    fn visit_impl_item_fn(&mut self, item: &'ast syn::ImplItemFn) {
        self.when_public(&item.vis, |this| this.visit_signature(&item.sig));
    }

    fn visit_item_struct(&mut self, item: &'ast syn::ItemStruct) {
        for field in &item.fields {
            self.when_public(&field.vis, |this| this.visit_type(&field.ty));
        }
    }

    fn visit_item_enum(&mut self, item: &'ast syn::ItemEnum) {
        self.when_public(&item.vis, |this| item.variants.iter().for_each(|v| this.visit_fields(&v.fields)));
    }

    fn visit_item_type(&mut self, item: &'ast syn::ItemType) {
        self.when_public(&item.vis, |this| this.visit_type(&item.ty));
    }

    fn visit_item_trait(&mut self, item: &'ast syn::ItemTrait) {
        self.when_public(&item.vis, |this| {
            for member in &item.items {
                if let syn::TraitItem::Fn(function) = member {
                    this.visit_signature(&function.sig);
                }
            }
        });
    }
}

fn offences(source: &str) -> Vec<String> {
    let file = syn::parse_file(source).unwrap();
    let mut look = Signatures::default();
    // Imports and hidden types first: they may stand anywhere in a file.
    for item in &file.items {
        match item {
            syn::Item::Use(item) => look.visit_item_use(item),
            syn::Item::Struct(item) if !matches!(item.vis, syn::Visibility::Public(_)) => {
                look.hidden.insert(item.ident.to_string());
            }
            syn::Item::Enum(item) if !matches!(item.vis, syn::Visibility::Public(_)) => {
                look.hidden.insert(item.ident.to_string());
            }
            _ => {}
        }
    }
    look.found.clear();
    look.visit_file(&file);
    look.found
}

fn rust_files(folder: &Path, into: &mut Vec<PathBuf>) {
    for entry in std::fs::read_dir(folder).unwrap() {
        let path = entry.unwrap().path();
        if path.is_dir() {
            rust_files(&path, into);
        } else if path.extension().is_some_and(|e| e == "rs") {
            into.push(path);
        }
    }
}

#[test]
fn no_type_of_a_dependency_stands_in_a_public_signature() {
    let mut files = Vec::new();
    for entry in std::fs::read_dir(Path::new(env!("CARGO_MANIFEST_DIR")).join("..")).unwrap() {
        let package = entry.unwrap().path();
        // The program itself has no callers.
        if package.file_name().is_some_and(|n| n != "cli") {
            rust_files(&package.join("src"), &mut files);
        }
    }
    assert!(files.len() > 10, "the guard found few files; has the layout changed?");
    for path in files {
        let found = offences(&std::fs::read_to_string(&path).unwrap());
        assert!(found.is_empty(), "{}: public signatures name {found:?}", path.display());
    }
}

#[test]
fn the_guard_sees_a_dependency_in_each_kind_of_signature() {
    for wrong in [
        "pub fn f() -> nalgebra::DMatrix<f64> { todo!() }",
        "use nalgebra::DMatrix; pub fn f(m: &DMatrix<f64>) {}",
        "use moyo::data::{Setting as S}; pub struct A { pub s: S }",
        "pub struct A; impl A { pub fn f(&self) -> Option<toml::Value> { None } }",
        "pub enum E { A(serde_json::Value) }",
        "pub type T = ndarray::Array1<f64>;",
        "pub use moyo::data::Setting;",
    ] {
        assert!(!offences(wrong).is_empty(), "{wrong}");
    }
    for right in [
        "fn f() -> nalgebra::DMatrix<f64> { todo!() }",
        "pub fn f() -> f64 { nalgebra::DMatrix::<f64>::zeros(1, 1)[0] }",
        "use toml::Value; pub(super) struct R; impl R { pub fn f(&self) -> Option<Value> { None } }",
        "pub(crate) fn f(m: &nalgebra::DMatrix<f64>) {}",
        "#[cfg(test)] mod tests { pub fn f() -> nalgebra::DMatrix<f64> { todo!() } }",
    ] {
        assert!(offences(right).is_empty(), "{right}");
    }
}
