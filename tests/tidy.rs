//! What must stay true of the repository itself.

#![allow(clippy::unwrap_used, clippy::panic, reason = "a test may stop at the first surprise")]

use std::fs;
use std::path::{Path, PathBuf};
use std::process::Command;

fn root() -> &'static Path {
    Path::new(env!("CARGO_MANIFEST_DIR"))
}

/// Every file below a folder with this ending.
fn files(folder: &str, ending: &str) -> Vec<PathBuf> {
    let mut found = Vec::new();
    let mut open = vec![root().join(folder)];
    while let Some(folder) = open.pop() {
        for entry in fs::read_dir(&folder).unwrap() {
            let path = entry.unwrap().path();
            if path.is_dir() {
                open.push(path);
            } else if path.to_string_lossy().ends_with(ending) {
                found.push(path);
            }
        }
    }
    found.sort();
    assert!(!found.is_empty(), "{folder} has no {ending}");
    found
}

/// Lines of source that contain one of these words, as `file:line: text`; comments don't count.
fn lines_with(folder: &str, words: &[&str]) -> Vec<String> {
    let mut found = Vec::new();
    for path in files(folder, ".rs") {
        for (number, line) in fs::read_to_string(&path).unwrap().lines().enumerate() {
            if !line.trim_start().starts_with("//") && words.iter().any(|word| line.contains(word)) {
                let name = path.strip_prefix(root()).unwrap().display().to_string();
                found.push(format!("{name}:{}: {}", number + 1, line.trim()));
            }
        }
    }
    found
}

#[test]
fn the_engine_and_the_fluids_touch_nothing_of_the_world() {
    let world = [
        "std::fs",
        "std::net",
        "std::time",
        "std::thread",
        "std::env",
        "println!",
        "print!(",
        "tokio",
        "async fn",
    ];
    for folder in ["server/engine/src", "server/thermo/src"] {
        assert_eq!(lines_with(folder, &world), Vec::<String>::new());
    }
}

#[test]
fn nothing_is_unsafe() {
    for folder in ["server", "tests"] {
        let found: Vec<String> =
            lines_with(folder, &["unsafe "]).into_iter().filter(|line| !line.contains("tidy.rs")).collect();
        assert_eq!(found, Vec::<String>::new());
    }
}

/// The engine's floors from the ground. A file may name its own floor and those before it.
const FLOORS: &[&[&str]] = &[
    &["quantity", "fault", "kkt"],
    &["plant", "formula", "fault"],
    &["equation"],
    &["equipment"],
    &["balance"],
    &["compile", "estimate"],
    &["verdict", "search"],
    &["method"],
    &["compiled_plant"],
];

#[test]
fn no_floor_of_the_engine_names_one_above_it() {
    let floor = |module: &str| FLOORS.iter().position(|floor| floor.contains(&module));
    let mut wrong = Vec::new();
    for path in files("server/engine/src", ".rs") {
        let relative = path.strip_prefix(root().join("server/engine/src")).unwrap();
        let own = relative.components().next().unwrap().as_os_str().to_string_lossy().replace(".rs", "");
        if own == "lib" {
            continue;
        }
        let own_floor = floor(&own).unwrap_or_else(|| panic!("`{own}` has no floor: add it to FLOORS"));
        for (number, line) in fs::read_to_string(&path).unwrap().lines().enumerate() {
            for used in line.split("crate::").skip(1) {
                let module: String = used.chars().take_while(|c| c.is_alphanumeric() || *c == '_').collect();
                // A fault speaks of places in the plant file, whose `Span` is the one thing it names above itself.
                let exception = own == "fault" && module == "plant";
                if floor(&module).is_some_and(|floor| floor > own_floor) && !exception {
                    wrong.push(format!("{}:{}: {}", relative.display(), number + 1, line.trim()));
                }
            }
        }
    }
    assert_eq!(wrong, Vec::<String>::new());
}

/// The service's floors from the ground; a file may name its own floor and those before it.
const SERVICE_FLOORS: &[&[&str]] = &[
    &["hash", "parallel", "average"],
    &["log"],
    &["series"],
    &["period"],
    &["steady"],
    &["found"],
    &["report"],
    &["ready", "record", "demo"],
    &["store"],
    &["trend", "work"],
    &["http"],
    &["command"],
];

#[test]
fn no_floor_of_the_service_names_one_above_it() {
    let floor = |module: &str| SERVICE_FLOORS.iter().rposition(|floor| floor.contains(&module));
    let mut wrong = Vec::new();
    for path in files("server/src", ".rs") {
        let relative = path.strip_prefix(root().join("server/src")).unwrap();
        let own = relative.components().next().unwrap().as_os_str().to_string_lossy().replace(".rs", "");
        if ["lib", "main"].contains(&own.as_str()) {
            continue;
        }
        let own_floor =
            floor(&own).unwrap_or_else(|| panic!("`{own}` has no floor: add it to SERVICE_FLOORS"));
        for (number, line) in fs::read_to_string(&path).unwrap().lines().enumerate() {
            for used in line.split("crate::").skip(1) {
                let module: String = used.chars().take_while(|c| c.is_alphanumeric() || *c == '_').collect();
                if floor(&module).is_some_and(|floor| floor > own_floor) {
                    wrong.push(format!("{}:{}: {}", relative.display(), number + 1, line.trim()));
                }
            }
        }
    }
    assert_eq!(wrong, Vec::<String>::new());
}

#[test]
fn only_the_store_knows_sql_and_only_the_outer_floors_http() {
    let is_in = |line: &str, folders: &[&str]| folders.iter().any(|folder| line.starts_with(folder));
    let mut wrong = lines_with("server", &["sqlx::", "SELECT ", "INSERT INTO", "UPDATE logs", "DELETE FROM"]);
    wrong.retain(|line| !is_in(line, &["server/src/store/"]));
    let mut http = lines_with("server", &["axum::", "StatusCode"]);
    http.retain(|line| !is_in(line, &["server/src/http/"]));
    assert_eq!([wrong, http].concat(), Vec::<String>::new());
}

#[test]
fn what_others_made_of_the_page_is_what_they_published() {
    let folder = root().join("web/vendor");
    let checksums = fs::read_to_string(folder.join("CHECKSUMS")).unwrap();
    let mut listed: Vec<&str> =
        checksums.lines().filter_map(|line| line.split_once("  ")).map(|(_, name)| name).collect();
    listed.sort_unstable();
    let there: Vec<String> = files("web/vendor", "")
        .iter()
        .map(|path| path.strip_prefix(&folder).unwrap().display().to_string())
        .filter(|name| name != "CHECKSUMS")
        .collect();
    assert_eq!(listed, there, "every file has its checksum");
    for library in there.iter().filter_map(|name| name.split_once('/')).map(|(library, _)| library) {
        assert!(listed.contains(&format!("{library}/LICENSE").as_str()), "{library} has its licence");
    }
    let checked = Command::new("sha256sum")
        .args(["--check", "--strict", "--quiet", "CHECKSUMS"])
        .current_dir(&folder)
        .output()
        .unwrap();
    assert!(checked.status.success(), "{}", String::from_utf8_lossy(&checked.stdout));
}

#[test]
fn the_page_asks_no_other_host_and_writes_no_markup() {
    for ending in [".js", ".html", ".css"] {
        for path in files("web", ending) {
            if path.starts_with(root().join("web/vendor")) {
                continue;
            }
            let text = fs::read_to_string(&path).unwrap();
            for word in ["http://", "https://", "innerHTML", "outerHTML", "insertAdjacentHTML", "eval("] {
                assert!(!text.contains(word), "{} has `{word}`", path.display());
            }
        }
    }
}

#[test]
fn only_the_agreed_names_stand_at_the_top() {
    let agreed = ["Cargo.toml", "Cargo.lock", "README.md", "DEVELOPERS.md", "LICENSE"];
    let folders = ["server", "migrations", "web", "tests", "deploy"];
    let output = Command::new("git").arg("ls-files").current_dir(root()).output().unwrap();
    let listing = String::from_utf8(output.stdout).unwrap();
    assert!(!listing.is_empty(), "git lists the repository's files");
    for file in listing.lines() {
        let top = file.split('/').next().unwrap();
        let allowed = top.starts_with('.') || agreed.contains(&top) || folders.contains(&top);
        assert!(allowed, "`{file}` does not belong at the top");
    }
}

#[test]
fn the_readme_names_every_kind_option_and_function() {
    let readme = fs::read_to_string(root().join("README.md")).unwrap();
    for kind in meterwright_engine::equipment::KINDS {
        assert!(readme.contains(&format!("`{}`", kind.name())), "README.md lacks the kind `{}`", kind.name());
        for port in kind.ports() {
            assert!(
                readme.contains(port.name),
                "README.md lacks the port `{}` of a {}",
                port.name,
                kind.name()
            );
        }
        for quantity in kind.quantities() {
            let name = quantity.name.split('.').next().unwrap();
            assert!(readme.contains(&format!("`{name}")), "README.md lacks `{name}` of a {}", kind.name());
        }
    }
    for command in ["reconcile", "check", "serve", "demo"] {
        let help =
            Command::new(env!("CARGO_BIN_EXE_meterwright")).args([command, "--help"]).output().unwrap();
        let help = String::from_utf8(help.stdout).unwrap();
        let options = help.split_whitespace().filter(|word| word.starts_with("--") && *word != "--help");
        for option in options.map(|word| word.trim_end_matches(|c: char| !c.is_ascii_alphabetic())) {
            assert!(
                readme.contains(&format!("`{option}")),
                "README.md lacks the option {option} of {command}"
            );
        }
    }
    for method in meterwright_engine::METHODS {
        assert!(
            readme.contains(&format!("`{}`", method.name)),
            "README.md lacks the method `{}`",
            method.name
        );
    }
    let functions = fs::read_to_string(root().join("server/engine/src/formula/function.rs")).unwrap();
    let names: Vec<&str> =
        functions.split("function(\"").skip(1).filter_map(|rest| rest.split('"').next()).collect();
    assert!(names.len() > 10, "the functions of formulas are found: {names:?}");
    for name in names {
        assert!(readme.contains(&format!("`{name}`")), "README.md lacks the function `{name}`");
    }
}

#[test]
fn every_kind_s_file_says_its_ports_and_equations() {
    for kind in meterwright_engine::equipment::KINDS {
        let path = root().join(format!("server/engine/src/equipment/{}.rs", kind.name()));
        let text =
            fs::read_to_string(&path).unwrap_or_else(|_| panic!("{} has no file of its own", kind.name()));
        let head: String = text.lines().take_while(|line| line.starts_with("//!")).collect();
        let head = head.to_lowercase();
        assert!(head.contains("port"), "{}: its doc block doesn't speak of ports", path.display());
        assert!(head.contains("equation"), "{}: its doc block doesn't speak of equations", path.display());
    }
}

#[test]
fn files_stay_short() {
    for path in files("server", ".rs") {
        let name = path.to_string_lossy();
        if name.ends_with("_table.rs") || name.ends_with("tests.rs") || name.contains("/tests/") {
            continue;
        }
        let lines = fs::read_to_string(&path).unwrap().lines().count();
        assert!(lines <= 520, "{} has {lines} lines: split it", path.display());
    }
}
