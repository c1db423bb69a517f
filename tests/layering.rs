//! A module imports only from those before it, and only `http` knows axum.

use std::{
    collections::BTreeSet,
    fs,
    path::{Path, PathBuf},
};

/// The modules of the crate, each of which may import only from those before it.
const ORDER: [&str; 14] = [
    "physics",
    "units",
    "document",
    "chain",
    "frames",
    "transform",
    "question",
    "answer",
    "pool",
    "sweep",
    "series",
    "picture",
    "config",
    "http",
];

/// What the physics may use from outside.
const PURE: [&str; 10] = [
    "std",
    "core",
    "dashu",
    "dashu_float",
    "dashu_int",
    "libm",
    "nalgebra",
    "pulp",
    "rand_xoshiro",
    "thiserror",
];

/// Every source file with the module that it belongs to.
fn sources() -> Vec<(String, PathBuf, String)> {
    let root = Path::new(env!("CARGO_MANIFEST_DIR")).join("src");
    let mut found = Vec::new();
    let mut folders = vec![root.clone()];
    while let Some(folder) = folders.pop() {
        for entry in fs::read_dir(&folder).expect("a folder of sources") {
            let path = entry.expect("an entry").path();
            if path.is_dir() {
                folders.push(path);
            } else if path.extension().is_some_and(|extension| extension == "rs") {
                let inside = path.strip_prefix(&root).expect("inside src");
                let module = inside.components().next().expect("a file");
                let module = module.as_os_str().to_string_lossy();
                let module = module.trim_end_matches(".rs").to_owned();
                let text = fs::read_to_string(&path).expect("UTF-8");
                found.push((module, path, without_comments(&text)));
            }
        }
    }
    found
}

fn without_comments(text: &str) -> String {
    let lines = text
        .lines()
        .filter(|line| !line.trim_start().starts_with("//"));
    lines.collect::<Vec<_>>().join("\n")
}

/// The first names after `crate::` in a text, also those in `crate::{a, b::c}`.
fn imports(text: &str) -> BTreeSet<String> {
    let mut names = BTreeSet::new();
    for rest in text.split("crate::").skip(1) {
        if let Some(group) = rest.strip_prefix('{') {
            let mut depth = 0;
            let mut start = true;
            let mut name = String::new();
            for letter in group.chars() {
                match letter {
                    '{' => depth += 1,
                    '}' if depth == 0 => break,
                    '}' => depth -= 1,
                    ',' if depth == 0 => start = true,
                    ':' if depth == 0 => start = false,
                    _ if depth == 0 && start && (letter.is_alphanumeric() || letter == '_') => {
                        name.push(letter);
                        continue;
                    }
                    _ => continue,
                }
                names.insert(std::mem::take(&mut name));
            }
            names.insert(name);
        } else {
            let end = rest.find(|letter: char| !letter.is_alphanumeric() && letter != '_');
            names.insert(rest[..end.unwrap_or(rest.len())].to_owned());
        }
    }
    names.remove("");
    names
}

#[test]
fn groups_of_imports_are_read() {
    let text = "use crate::{a::{b, c}, d, e::f};\nuse crate::g::h; crate::i()";
    let expected = ["a", "d", "e", "g", "i"].map(str::to_owned);
    assert_eq!(imports(text), BTreeSet::from(expected));
}

#[test]
fn modules_import_only_from_those_before_them() {
    let place = |name: &str| ORDER.iter().position(|module| *module == name);
    for (module, path, text) in sources() {
        if module == "lib" || module == "main" {
            continue;
        }
        let own = place(&module).unwrap_or_else(|| panic!("{module} has no place in the order"));
        for name in imports(&text) {
            let other = place(&name);
            let allowed = other.is_some_and(|other| other <= own);
            assert!(allowed, "{} imports crate::{name}", path.display());
        }
    }
}

#[test]
fn only_http_knows_axum() {
    for (module, path, text) in sources() {
        assert!(
            module == "http" || !text.contains("axum"),
            "{} mentions axum",
            path.display()
        );
    }
}

#[test]
fn the_physics_is_pure() {
    for (module, path, text) in sources() {
        if module != "physics" {
            continue;
        }
        for line in text.lines().map(str::trim_start) {
            let Some(used) = line.strip_prefix("use ").or(line.strip_prefix("pub use ")) else {
                continue;
            };
            let name = used
                .split("::")
                .next()
                .unwrap_or_default()
                .trim_end_matches(';');
            let own = ["crate", "super", "self"].contains(&name);
            // A name in lower case without a path is a module of the same file.
            let inside = !used.contains("::") || text.contains(&format!("mod {name};"));
            assert!(
                own || inside || PURE.contains(&name),
                "{} uses {name}",
                path.display()
            );
        }
    }
}
