//! The program: what it prints, how it refuses to start, and how it stops.

use std::{
    io::{BufRead, BufReader, Read, Write},
    net::{SocketAddr, TcpStream},
    process::{Child, Command, Output, Stdio},
    time::Duration,
};

/// The program, without any settings from the environment of the tests.
pub(crate) fn lodeframe(args: &[&str]) -> Command {
    let mut command = Command::new(env!("CARGO_BIN_EXE_lodeframe"));
    command.env_clear().args(args);
    command
}

/// The program serving on a free port.
pub(crate) struct Running {
    process: Child,
    pub(crate) address: SocketAddr,
    first_line: String,
}

impl Running {
    pub(crate) fn start(args: &[&str]) -> Running {
        Running::listen("127.0.0.1:0", args)
    }

    fn listen(address: &str, args: &[&str]) -> Running {
        Running::spawn(&mut lodeframe(
            &[&["serve", "--listen", address], args].concat(),
        ))
    }

    pub(crate) fn spawn(command: &mut Command) -> Running {
        let mut process = command
            .stdout(Stdio::piped())
            .stderr(Stdio::piped())
            .spawn()
            .expect("it starts");
        let mut first_line = String::new();
        BufReader::new(process.stdout.take().expect("piped"))
            .read_line(&mut first_line)
            .expect("a line");
        let word = first_line
            .split_whitespace()
            .find_map(|word| word.strip_prefix("http://"));
        let address = word.and_then(|word| word.parse().ok());
        Running {
            process,
            address: address.unwrap_or_else(|| panic!("an address in {first_line:?}")),
            first_line,
        }
    }

    pub(crate) fn connect(&self) -> TcpStream {
        let stream = TcpStream::connect(self.address).expect("it listens");
        stream
            .set_read_timeout(Some(Duration::from_secs(30)))
            .expect("a socket option");
        stream
    }

    /// Asks the process to stop, as a service manager does.
    pub(crate) fn terminate(&self) {
        let id = self.process.id().to_string();
        let sent = Command::new("kill").args(["-TERM", &id]).status();
        assert!(sent.expect("kill runs").success());
    }

    /// Waits for the end; the exit code and the log.
    pub(crate) fn end(mut self) -> (Option<i32>, String) {
        let mut log = String::new();
        let mut out = self.process.stderr.take().expect("piped");
        out.read_to_string(&mut log).expect("UTF-8");
        (self.process.wait().expect("it ends").code(), log)
    }
}

fn refuse(command: &mut Command) -> String {
    let Output {
        status,
        stdout,
        stderr,
    } = command.output().expect("it runs");
    assert_eq!(status.code(), Some(2));
    assert!(stdout.is_empty(), "nothing is served");
    String::from_utf8(stderr).expect("UTF-8")
}

const GET: &str = "GET /health/live HTTP/1.1\r\nhost: localhost\r\n";

#[test]
fn it_says_where_it_listens_and_stops_when_told() {
    let running = Running::start(&[]);
    let start = format!("Lodeframe 0.1.0 listens on http://{}", running.address);
    assert!(
        running.first_line.starts_with(&start),
        "{}",
        running.first_line
    );
    running.terminate();
    assert_eq!(running.end().0, Some(0));
}

#[test]
fn a_request_that_runs_is_finished_before_the_end() {
    let running = Running::start(&[]);
    let mut stream = running.connect();
    // Half a request: the service has begun to read it when it is told to stop.
    let head = "POST /health/live HTTP/1.1\r\nhost: localhost\r\nconnection: close\r\n";
    stream.write_all(head.as_bytes()).expect("it reads");
    std::thread::sleep(Duration::from_millis(100));
    running.terminate();
    std::thread::sleep(Duration::from_millis(100));
    assert!(
        TcpStream::connect(running.address).is_err(),
        "it accepts no more"
    );
    stream.write_all(b"\r\n").expect("it still reads");
    let mut answer = String::new();
    stream.read_to_string(&mut answer).expect("it answers");
    assert!(answer.starts_with("HTTP/1.1 405"), "{answer}");
    assert_eq!(running.end().0, Some(0));
}

#[test]
fn an_idle_connection_does_not_hold_up_the_end() {
    let running = Running::start(&["--grace", "1h"]);
    let mut stream = running.connect();
    stream
        .write_all(format!("{GET}\r\n").as_bytes())
        .expect("it reads");
    let mut byte = [0];
    stream.read_exact(&mut byte).expect("it answers");
    running.terminate();
    assert_eq!(running.end().0, Some(0));
}

#[test]
fn a_connection_is_closed_once_it_idles_and_not_while_it_asks() {
    let running = Running::start(&["--idle-timeout", "1s"]);
    let mut stream = running.connect();
    let mut answer = [0; 4096];
    for _ in 0..5 {
        // Each request moves the deadline: together they take longer than one idle time.
        stream
            .write_all(format!("{GET}\r\n").as_bytes())
            .expect("it reads");
        assert!(stream.read(&mut answer).expect("it answers") > 0);
        std::thread::sleep(Duration::from_millis(300));
    }
    let mut rest = Vec::new();
    stream.read_to_end(&mut rest).expect("it closes by itself");
    assert!(rest.is_empty(), "{rest:?}");
    running.terminate();
    assert_eq!(running.end().0, Some(0));
}

#[test]
fn the_log_has_a_line_a_request_and_no_secret() {
    let trace = "00-4bf92f3577b34da6a3ce929d0e0e4736-00f067aa0ba902b7-01";
    for (form, expected) in [
        (
            "text",
            " method=GET route=/health/live status=200 microseconds=",
        ),
        (
            "json",
            "\"method\":\"GET\",\"route\":\"/health/live\",\"status\":200,\"microseconds\":",
        ),
    ] {
        let running = Running::start(&["--log", form]);
        let mut stream = running.connect();
        let request = format!(
            "GET /health/live?token=swordfish HTTP/1.1\r\nhost: localhost\r\nauthorization: Bearer swordfish\r\n\
             traceparent: {trace}\r\nconnection: close\r\n\r\n"
        );
        stream.write_all(request.as_bytes()).expect("it reads");
        let mut answer = String::new();
        stream.read_to_string(&mut answer).expect("it answers");
        let id = answer
            .lines()
            .find_map(|line| line.strip_prefix("x-request-id: "));
        running.terminate();
        let (_, log) = running.end();
        assert_eq!(log.lines().count(), 1, "{log}");
        assert!(log.contains(expected), "{log}");
        assert!(
            log.contains(id.expect("an id")) && log.contains(trace),
            "{log}"
        );
        assert!(!log.contains("swordfish"), "{log}");
        if form == "json" {
            let line: serde_json::Value = serde_json::from_str(&log).expect("a JSON object");
            assert_eq!(line["trace"], trace);
        }
    }
}

#[test]
fn no_log_means_none() {
    let running = Running::start(&["--log", "off"]);
    let mut stream = running.connect();
    stream
        .write_all(format!("{GET}connection: close\r\n\r\n").as_bytes())
        .expect("it reads");
    stream
        .read_to_string(&mut String::new())
        .expect("it answers");
    running.terminate();
    assert_eq!(running.end(), (Some(0), String::new()));
}

#[test]
fn all_wrong_settings_are_named_at_once() {
    let message = refuse(
        lodeframe(&[
            "--listen",
            "0.0.0.0:7410",
            "--max-body",
            "large",
            "--grace=-1s",
            "--request-timeout",
            "0s",
        ])
        .args([
            "--cors-origin",
            "*",
            "--cors-origin",
            "https://lab.example/page",
            "--log",
            "loud",
        ])
        .env("LODEFRAME_MAX_STEPS", "0")
        .env("LODEFRAME_MAX_STEP", "5"),
    );
    for fault in [
        "add --open",
        "--max-body is \"large\"; it must be a size such as",
        "--grace is \"-1s\"; it must be a time such as",
        "--request-timeout is \"0s\"; it must be longer",
        "--cors-origin is \"*\"",
        "--cors-origin is \"https://lab.example/page\"",
        "--log is \"loud\"; it must be text, json or off",
        "--max-steps is \"0\"; it must be a whole number from 1",
        "LODEFRAME_MAX_STEP is not a variable",
    ] {
        assert!(message.contains(fault), "{fault} in\n{message}");
    }
    assert_eq!(message.lines().count(), 10, "{message}");
}

#[test]
fn an_unknown_flag_is_refused() {
    let message = refuse(&mut lodeframe(&["--listn", "127.0.0.1:0"]));
    assert!(
        message.contains("--listn") && message.contains("--listen"),
        "{message}"
    );
}

#[test]
fn other_addresses_need_open() {
    let address = ["--listen", "0.0.0.0:0"];
    for command in [
        &mut lodeframe(&["serve", "--open=false"]),
        &mut lodeframe(&[]),
    ] {
        let message = refuse(command.args(address));
        assert!(message.contains("add --open to answer anyone"), "{message}");
    }
    let running = Running::listen("0.0.0.0:0", &["--open"]);
    running.terminate();
    assert_eq!(running.end().0, Some(0));
}

#[test]
fn access_is_settled_without_contradiction() {
    let file = std::env::temp_dir().join(format!("lodeframe-tokens-{}", std::process::id()));
    let path = file.to_str().expect("UTF-8");
    let made = lodeframe(&["token", "logger-3"]).output().expect("it runs");
    assert!(made.status.success());
    let secret = String::from_utf8(made.stderr).expect("UTF-8");
    let secret = secret.lines().nth(1).expect("the token").to_owned();
    std::fs::write(&file, made.stdout).expect("a file");

    let both = refuse(lodeframe(&["--tokens", path, "--open"]).args(["--tls-key", "key.pem"]));
    assert!(
        both.contains("leave one of them out") && both.contains("TLS needs both"),
        "{both}"
    );
    assert_eq!(both.lines().count(), 3, "{both}");
    let none = refuse(
        lodeframe(&["--tokens", "/no/such/file", "--listen", "0.0.0.0:0"]).args([
            "--tls-key",
            "/no/key",
            "--tls-cert",
            path,
        ]),
    );
    for fault in [
        "--tokens /no/such/file cannot",
        "--tls-key /no/key",
        "holds no certificate",
    ] {
        assert!(none.contains(fault), "{fault} in\n{none}");
    }
    assert_eq!(none.lines().count(), 4, "{none}");
    let name = lodeframe(&["token", "two words"])
        .output()
        .expect("it runs");
    assert_eq!(name.status.code(), Some(2));

    let running = Running::listen("0.0.0.0:0", &["--tokens", path]);
    let mut stream = running.connect();
    let request = format!(
        "GET /metrics HTTP/1.1\r\nhost: localhost\r\nauthorization: Bearer {secret}\r\nconnection: close\r\n\r\n"
    );
    stream.write_all(request.as_bytes()).expect("it reads");
    let mut answer = String::new();
    stream.read_to_string(&mut answer).expect("it answers");
    assert!(answer.starts_with("HTTP/1.1 200"), "{answer}");
    running.terminate();
    let (code, log) = running.end();
    assert_eq!(code, Some(0));
    assert!(log.contains(" token_of=logger-3"), "{log}");
    assert!(log.contains("tokens travel readable"), "{log}");
    assert!(!log.contains(&secret) && !answer.contains(&secret));
    std::fs::remove_file(file).expect("it was there");
}

#[test]
fn the_settings_in_effect_are_an_environment_file() {
    let printed = lodeframe(&["serve", "--print-config", "--max-steps", "7"])
        .env("LODEFRAME_GRACE", "5s")
        .env("LODEFRAME_MAX_STEPS", "9")
        .env("LODEFRAME_FRAMES", "/srv/two words.toml")
        .output()
        .expect("it runs");
    assert!(printed.status.success());
    let text = String::from_utf8(printed.stdout).expect("UTF-8");
    for line in [
        "LODEFRAME_LISTEN=127.0.0.1:7410",
        "# LODEFRAME_TOKENS=",
        "LODEFRAME_MAX_STEPS=7",
        "LODEFRAME_GRACE=5s",
        "LODEFRAME_FRAMES='/srv/two words.toml'",
    ] {
        assert!(text.lines().any(|found| found == line), "{line} in\n{text}");
    }
    // It reads what it prints.
    let mut again = lodeframe(&["--print-config"]);
    for line in text.lines().filter(|line| !line.starts_with('#')) {
        let (name, value) = line.split_once('=').expect("a variable");
        again.env(name, value.trim_matches('\''));
    }
    assert_eq!(again.output().expect("it runs").stdout, text.as_bytes());
    // Every setting is in the help, with its variable.
    let help = lodeframe(&["serve", "--help"]).output().expect("it runs");
    let help = String::from_utf8(help.stdout).expect("UTF-8");
    for line in text.lines() {
        let name = line
            .trim_start_matches("# ")
            .split('=')
            .next()
            .expect("a name");
        assert!(
            help.contains(&format!("[env: {name}=")),
            "{name} in\n{help}"
        );
    }
}

#[test]
fn a_port_in_use_is_named() {
    let running = Running::start(&[]);
    let address = running.address.to_string();
    let output = lodeframe(&["--listen", &address])
        .output()
        .expect("it runs");
    assert_eq!(output.status.code(), Some(1));
    let message = String::from_utf8(output.stderr).expect("UTF-8");
    assert!(
        message.contains(&address) && message.contains("--listen"),
        "{message}"
    );
    running.terminate();
    running.end();
}

#[test]
fn it_knows_its_version_and_prints_its_document() {
    let version = lodeframe(&["--version"]).output().expect("it runs");
    assert_eq!(version.stdout, b"lodeframe 0.1.0\n");
    let document = lodeframe(&["openapi"]).output().expect("it runs");
    assert!(document.status.success());
    let document: serde_json::Value = serde_json::from_slice(&document.stdout).expect("JSON");
    assert_eq!(document["info"]["version"], "0.1.0");
}
