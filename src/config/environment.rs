//! The settings as variables.

use std::ffi::OsString;

use clap::{ArgMatches, CommandFactory};

use super::CommandLine;

/// The settings in effect as an environment file: a line `LODEFRAME_NAME=value` each, those without
/// a value as comments. A shell and systemd's `EnvironmentFile=` read it.
pub fn environment(matches: &ArgMatches) -> String {
    let matches = matches.subcommand_matches("serve").unwrap_or(matches);
    let command = CommandLine::command();
    let lines = command.get_arguments().filter_map(|arg| {
        let name = arg.get_env()?.to_string_lossy();
        Some(match matches.get_raw(arg.get_id().as_str()) {
            Some(values) => {
                let values: Vec<_> = values.map(|value| value.to_string_lossy()).collect();
                format!("{name}={}\n", quoted(&values.join(",")))
            }
            None => format!("# {name}=\n"),
        })
    });
    lines.collect()
}

/// The text as one word of a shell.
fn quoted(text: &str) -> String {
    let plain = |c: char| c.is_ascii_alphanumeric() || "-_./:,[]@%+".contains(c);
    if text.chars().all(plain) {
        text.to_owned()
    } else {
        format!("'{}'", text.replace('\'', r"'\''"))
    }
}

/// The `LODEFRAME_*` variables among `names` that no flag knows.
pub fn unknown_variables(names: impl Iterator<Item = OsString>) -> Vec<String> {
    let command = CommandLine::command();
    let known: Vec<_> = command
        .get_arguments()
        .filter_map(|arg| arg.get_env())
        .collect();
    names
        .filter(|name| !known.contains(&name.as_os_str()))
        .map(|name| name.to_string_lossy().into_owned())
        .filter(|name| name.starts_with("LODEFRAME_"))
        .map(|name| {
            format!("{name} is not a variable that lodeframe knows; `lodeframe --help` lists them.")
        })
        .collect()
}
