//! A catalogue of 1,000 frames with a track of a million rows: how long it takes to load, in how
//! much memory, and what a row costs that is looked up in the order of time.
//!
//! `cargo bench --bench frames`; needs Linux for the peak of memory.

use std::fmt::Write as _;
use std::fs::{self, File};
use std::hint::black_box;
use std::io::{BufWriter, Write};
use std::path::Path;

use lodeframe::frames::{Link, Time, Walker, load};

mod stopwatch;
use stopwatch::Stopwatch;

const FRAMES: usize = 1_000;
const ROWS: usize = 1_000_000;

fn main() {
    let folder = Path::new(env!("CARGO_TARGET_TMPDIR")).join("bench_frames");
    fs::create_dir_all(&folder).expect("a folder");
    write_catalogue(&folder);
    write_track(&folder);
    let before = peak_mib();
    let start = Stopwatch::start();
    let catalogue = load(&folder.join("frames.toml")).expect("a catalogue");
    let [wall, busy] = start.seconds();
    println!(
        "load {FRAMES} frames and {ROWS} rows: {wall:.2} s ({busy:.2} s of processor), peak {:.0} MiB \
         (before: {before:.0} MiB)",
        peak_mib()
    );
    let find = |name: &str| catalogue.find(name).expect("a frame");
    let Link::Track(track) = &catalogue.frames()[find("craft")].link else {
        unreachable!("craft has a track");
    };
    // Between the rows, where velocities and attitudes are interpolated; three for every two rows.
    let times: Vec<Time> = (0..3 * (ROWS - 1) / 2)
        .map(|n| Time::from_seconds((n as f64 + 0.5) / 150.0).expect("a time"))
        .collect();
    let per_row = |name: &str, mut each: Box<dyn FnMut(Time) + '_>| {
        let start = Stopwatch::start();
        for time in &times {
            each(*time);
        }
        let [wall, busy] = start.seconds().map(|s| s * 1e9 / times.len() as f64);
        println!("{name}: {wall:.0} ns a row ({busy:.0} ns of processor)");
    };
    let mut hint = 0;
    per_row(
        "look up and interpolate, in the order of time",
        Box::new(|time| {
            black_box(track.sample(time, &mut hint));
        }),
    );
    let walk = catalogue.walk(find("f999"), find("ground")).expect("a way");
    let mut walker = Walker::new(walk);
    per_row(
        "the whole way, resolved (ten fixed frames and the track)",
        Box::new(|time| {
            black_box(walker.at(Some(time)).expect("inside"));
        }),
    );
}

/// Chains of ten frames that hang from the one that moves.
fn write_catalogue(folder: &Path) {
    let mut text = String::from(
        "epoch = \"T0\"\n[units]\nangle = \"deg\"\n[frames.ground]\n[frames.craft]\n\
         parent = \"ground\"\ntrack = \"craft.csv\"\nmax_gap = 1\n",
    );
    for n in 2..FRAMES {
        let parent = if n % 10 == 2 {
            "craft".to_owned()
        } else {
            format!("f{}", n - 1)
        };
        writeln!(
            text,
            "[frames.f{n}]\nparent = \"{parent}\"\nabout = \"frame {n}\"\n\
             steps = [{{ rotate = {{ axis = [0, {n}, 1], angle = {n} }} }}]"
        )
        .expect("memory");
    }
    fs::write(folder.join("frames.toml"), text).expect("a file");
}

/// A hundred rows a second, spinning once in four seconds.
fn write_track(folder: &Path) {
    let mut file = BufWriter::new(File::create(folder.join("craft.csv")).expect("a file"));
    writeln!(
        file,
        "time,vx,vy,vz,qw,qx,qy,qz,u_vx,u_vy,u_vz,u_rx,u_ry,u_rz"
    )
    .expect("a row");
    for n in 0..ROWS {
        let t = n as f64 / 100.0;
        let (z, w) = (0.25 * std::f64::consts::PI * t).sin_cos();
        let (x, y) = (7000.0 * (0.001 * t).cos(), 7000.0 * (0.001 * t).sin());
        writeln!(
            file,
            "{t},{x},{y},{},{w},0,0,{z},0.1,0.1,0.2,0.01,0.01,0.05",
            -0.125 * t
        )
        .expect("a row");
    }
    file.flush().expect("a file");
}

/// The most memory this process has held, in MiB.
fn peak_mib() -> f64 {
    let status = fs::read_to_string("/proc/self/status").unwrap_or_default();
    let line = status.lines().find_map(|line| line.strip_prefix("VmHWM:"));
    let kib = line.and_then(|line| line.trim().trim_end_matches(" kB").parse::<f64>().ok());
    kib.map_or(f64::NAN, |kib| kib / 1024.0)
}
