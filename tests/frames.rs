//! The catalogue of named frames: what loading refuses, and the ways through the tree.

use std::path::{Path, PathBuf};
use std::sync::Arc;

use lodeframe::answer::Answer;
use lodeframe::document::{Code, Fault, Node};
use lodeframe::frames::{Catalogue, LoadFault, Time, Walker, load};
use lodeframe::question::{Deployment, Question};
use serde_json::{Value, json};

/// A folder of its own for each test, with these files in it; the first is the catalogue.
fn folder(name: &str, files: &[(&str, &str)]) -> PathBuf {
    let folder = Path::new(env!("CARGO_TARGET_TMPDIR")).join(name);
    std::fs::create_dir_all(&folder).expect("a folder for test files");
    for (file, text) in files {
        std::fs::write(folder.join(file), text).expect("a test file");
    }
    folder.join(files[0].0)
}

fn loaded(name: &str, files: &[(&str, &str)]) -> Catalogue {
    load(&folder(name, files)).unwrap_or_else(|faults| {
        let lines: Vec<String> = faults.iter().map(LoadFault::to_string).collect();
        panic!("{}", lines.join("\n"))
    })
}

fn ask(catalogue: Catalogue, question: Value) -> Result<Answer, Vec<Fault>> {
    let deployment = Deployment {
        steps: 10,
        trials: 100_000,
        frames: Some(Arc::new(catalogue)),
    };
    ask_at(&deployment, question)
}

fn ask_at(deployment: &Deployment, question: Value) -> Result<Answer, Vec<Fault>> {
    let text = question.to_string();
    let node = Node::from_json(text.as_bytes()).expect("well-formed");
    let question = Question::read(&node, deployment)?;
    Ok(Answer::to(&question).expect("an answer that doubles hold"))
}

fn codes(faults: &[Fault]) -> Vec<Code> {
    faults.iter().map(|fault| fault.code).collect()
}

/// Loads a catalogue that is wrong; each fault as code, file, line and frame.
fn refused(name: &str, files: &[(&str, &str)]) -> Vec<(Code, String, Option<u64>, Option<String>)> {
    let faults = load(&folder(name, files)).expect_err("a catalogue with faults");
    let told = faults.into_iter().map(|fault| {
        let file = fault.file.file_name().expect("a name");
        (
            fault.reason.code,
            file.to_string_lossy().into_owned(),
            fault.line,
            fault.frame,
        )
    });
    told.collect()
}

/// One fault in the catalogue itself.
fn refuses(name: &str, text: &str, code: Code, line: u64, frame: Option<&str>) {
    let expected = (
        code,
        "frames.toml".to_owned(),
        Some(line),
        frame.map(str::to_owned),
    );
    assert_eq!(refused(name, &[("frames.toml", text)]), [expected]);
}

/// One fault in the track of the frame "moving".
fn refuses_track(name: &str, track: &str, code: Code, line: u64) {
    let catalogue = "epoch = \"T0\"\n[frames.ground]\n[frames.moving]\nparent = \"ground\"\n\
                     track = \"track.csv\"\nmax_gap = 10\n";
    let files = [("frames.toml", catalogue), ("track.csv", track)];
    let expected = (
        code,
        "track.csv".to_owned(),
        Some(line),
        Some("moving".to_owned()),
    );
    assert_eq!(refused(name, &files), [expected]);
}

#[test]
fn faults_of_the_file() {
    refuses("syntax", "[frames.a]\nx = \n", Code::Syntax, 2, None);
    refuses(
        "twice",
        "[frames.a]\n[frames.a]\n",
        Code::RepeatedField,
        2,
        None,
    );
    refuses(
        "unknown",
        "[frames.a]\ncolour = 1\n",
        Code::UnknownField,
        2,
        Some("a"),
    );
    refuses(
        "top",
        "frame = 1\n[frames.a]\n",
        Code::UnknownField,
        1,
        None,
    );
    refuses("empty", "about = \"x\"\n", Code::MissingField, 1, None);
    refuses("no_frames", "[frames]\n", Code::MissingField, 1, None);
    refuses(
        "unit",
        "[units]\ne = \"mv/m\"\n[frames.a]\n",
        Code::UnknownUnit,
        2,
        None,
    );
    refuses(
        "type",
        "[frames.a]\nabout = 3\n",
        Code::WrongType,
        2,
        Some("a"),
    );
    let missing = load(Path::new("/nowhere/frames.toml")).expect_err("no such file");
    assert_eq!(missing[0].reason.code, Code::UnreadableFile);
}

#[test]
fn faults_of_the_tree() {
    let parent = "[frames.a]\n[frames.b]\nparent = \"c\"\n";
    refuses("parent", parent, Code::UnknownParent, 3, Some("b"));
    let roots = "[frames.a]\n[frames.b]\n";
    refuses("roots", roots, Code::SeveralRoots, 2, Some("b"));
    let circle = "[frames.a]\n[frames.d]\nparent = \"b\"\n[frames.b]\nparent = \"c\"\n\
                  [frames.c]\nparent = \"b\"\n";
    refuses("circle", circle, Code::FrameCycle, 5, Some("b"));
    let own = "[frames.a]\nparent = \"a\"\n";
    refuses("own", own, Code::FrameCycle, 2, Some("a"));
    let leaf =
        "[frames.a]\n[frames.s]\nparent = \"a\"\nsensor.b = {}\n[frames.c]\nparent = \"s\"\n";
    refuses("leaf", leaf, Code::SensorNotLeaf, 6, Some("c"));
    let orphan = "[frames.a]\nsteps = []\n";
    refuses("orphan", orphan, Code::MissingField, 2, Some("a"));
}

#[test]
fn faults_of_a_step() {
    let step =
        |step: &str| format!("[frames.a]\n[frames.b]\nparent = \"a\"\nsteps = [\n{step}\n]\n");
    let cases = [
        (
            "light",
            "{ boost = { velocity = [3e8, 0, 0] } }",
            Code::FasterThanLight,
        ),
        (
            "matrix",
            "{ rotate = { matrix = [[1, 0, 0], [0, 1, 0], [0, 0, 2]] } }",
            Code::NotARotation,
        ),
        ("kind", "{ shift = 1 }", Code::UnknownField),
        (
            "short",
            "{ boost = { velocity = [1, 0] } }",
            Code::WrongLength,
        ),
        (
            "infinite",
            "{ boost = { velocity = [inf, 0, 0] } }",
            Code::NumberOutOfRange,
        ),
        (
            "both",
            "{ boost = { velocity = [1, 0, 0], beta = [0, 0, 0] } }",
            Code::ConflictingFields,
        ),
    ];
    for (name, text, code) in cases {
        let found = refused(name, &[("frames.toml", &step(text))]);
        assert!(
            found.iter().any(|(own, _, line, frame)| *own == code
                && *line == Some(5)
                && frame.as_deref() == Some("b")),
            "{name}: {found:?}"
        );
    }
    let both = "[frames.a]\n[frames.b]\nparent = \"a\"\nsteps = []\ntrack = \"t.csv\"\n";
    refuses("links", both, Code::ConflictingFields, 2, Some("b"));
    let gap = "[frames.a]\n[frames.b]\nparent = \"a\"\nmax_gap = 1\n";
    refuses("gap_alone", gap, Code::ConflictingFields, 4, Some("b"));
}

#[test]
fn faults_of_turning() {
    let turning = |rest: &str| {
        format!("epoch = \"T0\"\n[frames.a]\n[frames.b]\nparent = \"a\"\nturning = {rest}\n")
    };
    let still = turning("{ angular_velocity = [0, 0, 0], epoch = 0 }");
    refuses("still", &still, Code::NoDirection, 5, Some("b"));
    let fast = turning("{ angular_velocity = [0, 0, 1e6], epoch = 0 }\nposition = [1e3, 0, 0]");
    refuses("fast", &fast, Code::FasterThanLight, 5, Some("b"));
    let clock = turning("{ angular_velocity = [0, 0, 1], epoch = \"2031-03-02T05:10:00Z\" }");
    refuses("clock", &clock, Code::WrongTime, 5, Some("b"));
    let when = turning("{ angular_velocity = [0, 0, 1] }");
    refuses("when", &when, Code::MissingField, 5, Some("b"));
}

#[test]
fn faults_of_a_sensor() {
    let sensor =
        |text: &str| format!("[frames.a]\n[frames.s]\nparent = \"a\"\nsensor.b = {{ {text} }}\n");
    let singular = sensor("matrix = [[1, 2, 3], [2, 4, 6], [0, 0, 1]]");
    refuses("singular", &singular, Code::SingularMatrix, 4, Some("s"));
    let mixed = sensor("axes = [\"x\", \"y\"], matrix = [[1, 0, 0.1], [0, 1, 0], [0, 0, 1]]");
    refuses("mixed", &mixed, Code::ConflictingFields, 4, Some("s"));
    let axis = sensor("axes = [\"x\", \"w\"]");
    refuses("axis", &axis, Code::UnknownChoice, 4, Some("s"));
    let negative = sensor("uncertainty = { offset = [1, -1, 1] }");
    refuses(
        "negative",
        &negative,
        Code::NegativeUncertainty,
        4,
        Some("s"),
    );
    let nothing = "[frames.a]\n[frames.s]\nparent = \"a\"\nsensor = {}\n";
    refuses("nothing", nothing, Code::MissingField, 4, Some("s"));
}

#[test]
fn faults_of_a_track() {
    let still = "0,0,0,1,0,0,0\n";
    let track = |rows: &str| format!("time,vx,vy,vz,qw,qx,qy,qz\n{rows}");
    let cases = [
        (
            "unsorted",
            track(&format!("5,{still}4,{still}")),
            Code::UnsortedTimes,
            3,
        ),
        (
            "repeated",
            track(&format!("5,{still}5.0,{still}")),
            Code::RepeatedTime,
            3,
        ),
        (
            "gap",
            track(&format!("5,{still}15.5,{still}")),
            Code::GapTooLong,
            3,
        ),
        (
            "jump",
            track(&format!("5,{still}6,0,0,0,0.6,0.8,0,0\n")),
            Code::AttitudeJump,
            3,
        ),
        (
            "no_unit",
            track("5,0,0,0,1,0.01,0,0\n"),
            Code::NotARotation,
            2,
        ),
        (
            "too_fast",
            track("5,0,3e8,0,1,0,0,0\n"),
            Code::FasterThanLight,
            2,
        ),
        ("hole", track("5,0,,0,1,0,0,0\n"), Code::WrongType, 2),
        (
            "not_a_number",
            track("5,0,nan,0,1,0,0,0\n"),
            Code::WrongType,
            2,
        ),
        (
            "calendar",
            track(&format!("2031-03-02T05:10:00Z,{still}")),
            Code::WrongTime,
            2,
        ),
        ("ragged", track("5,0,0\n"), Code::WrongLength, 2),
        ("no_row", track(""), Code::MissingField, 1),
        ("no_header", String::new(), Code::MissingField, 1),
        ("no_time", "vx,vy,vz\n0,0,0\n".into(), Code::MissingField, 1),
        ("time_alone", "time\n5\n".into(), Code::MissingField, 1),
        (
            "two_of_three",
            "time,vx,vy\n5,0,0\n".into(),
            Code::MissingField,
            1,
        ),
        (
            "same_column",
            "time,vx,vy,vz,vx\n5,0,0,0,0\n".into(),
            Code::RepeatedField,
            1,
        ),
        (
            "other_column",
            "time,VX,vx,vy,vz\n5,0,0,0,0\n".into(),
            Code::UnknownField,
            1,
        ),
        (
            "sigma",
            "time,vx,vy,vz,u_vx,u_vy,u_vz\n5,0,0,0,1,-1,1\n".into(),
            Code::NegativeUncertainty,
            2,
        ),
    ];
    for (name, text, code, line) in cases {
        refuses_track(name, &text, code, line);
    }
    let absent = "[frames.a]\n[frames.b]\nparent = \"a\"\ntrack = \"absent.csv\"\n";
    let found = refused("absent", &[("frames.toml", absent)]);
    assert_eq!(
        found,
        [(
            Code::UnreadableFile,
            "absent.csv".into(),
            None,
            Some("b".into())
        )]
    );
}

#[test]
fn all_faults_are_told_at_once_in_the_order_of_the_lines() {
    let catalogue = "epoch = \"T0\"\n[frames.ground]\n[frames.a]\nparent = \"grund\"\n\
                     [frames.b]\nparent = \"ground\"\nsteps = [{ boost = { beta = [1, 0, 0] } }]\n\
                     [frames.c]\nparent = \"ground\"\ntrack = \"c.csv\"\n";
    let track = "time,vx,vy,vz\n2,0,0,0\n1,0,0,0\n0,0,x,0\n";
    let found = refused("all", &[("frames.toml", catalogue), ("c.csv", track)]);
    let told: Vec<_> = found
        .iter()
        .map(|(code, file, line, _)| (*code, &**file, *line))
        .collect();
    assert_eq!(
        told,
        [
            (Code::UnknownParent, "frames.toml", Some(4)),
            (Code::FasterThanLight, "frames.toml", Some(7)),
            (Code::UnsortedTimes, "c.csv", Some(3)),
            (Code::WrongType, "c.csv", Some(4)),
        ]
    );
}

#[test]
fn many_bad_rows_are_counted() {
    let mut track = String::from("time,vx,vy,vz\n");
    for _ in 0..1000 {
        track += "1,0,0,0\n";
    }
    let catalogue = "epoch = \"T0\"\n[frames.a]\n[frames.b]\nparent = \"a\"\ntrack = \"b.csv\"\n";
    let files = [("frames.toml", catalogue), ("b.csv", track.as_str())];
    let faults = load(&folder("many", &files)).expect_err("repeated times");
    assert_eq!(faults.len(), 20);
    assert!(
        faults[19].reason.detail.contains("979 more"),
        "{}",
        faults[19]
    );
}

const TREE: &str = "
[units]
angle = \"deg\"
velocity = \"km/s\"
[frames.ground]
[frames.ship]
parent = \"ground\"
steps = [{ boost = { velocity = [60000, 0, 0] } }, { rotate = { axis = [0, 0, 1], angle = 30 } }]
[frames.mast]
parent = \"ship\"
steps = [{ rotate = { axis = [1, 0, 0], angle = 40 } }]
[frames.hull]
parent = \"ship\"
steps = [{ boost = { velocity = [0, 90000, 0] } }]
";

#[test]
fn a_way_goes_up_and_down_the_tree() {
    let deployment = Deployment {
        steps: 10,
        trials: 100_000,
        frames: Some(Arc::new(loaded("tree", &[("frames.toml", TREE)]))),
    };
    let reading = json!({"e": [1.0, 2.0, 3.0], "b": [1e-9, -2e-9, 4e-9]});
    let with = |more: Value| {
        let mut question = reading.clone();
        let members = question.as_object_mut().expect("an object");
        members.extend(more.as_object().expect("an object").clone());
        let answer = ask_at(&deployment, question).expect("an answer");
        (answer.e, answer.b, answer.net.gamma)
    };
    let units = json!({"angle": "deg", "velocity": "km/s"});
    let up = json!({"rotate": {"axis": [1, 0, 0], "angle": 40, "inverse": true}});
    let down = json!({"boost": {"velocity": [0, 90000, 0]}});
    // Siblings meet at their parent; the ground is not on the way.
    assert_eq!(
        with(json!({"from": "mast", "to": "hull"})),
        with(json!({"units": units, "steps": [up, down]}))
    );
    let ship = [
        json!({"boost": {"velocity": [60000, 0, 0]}}),
        json!({"rotate": {"axis": [0, 0, 1], "angle": 30}}),
    ];
    assert_eq!(
        with(json!({"from": "ground", "to": "hull"})),
        with(json!({"units": units, "steps": [ship[0], ship[1], down]}))
    );
    assert_eq!(
        with(json!({"from": "mast", "to": "ground"})),
        with(json!({"units": units, "inverse": true,
                    "steps": [ship[0], ship[1], {"rotate": {"axis": [1, 0, 0], "angle": 40}}]}))
    );
    assert_eq!(
        with(json!({"from": "mast", "to": "ground", "inverse": true})),
        with(json!({"from": "ground", "to": "mast"}))
    );
    let (e, _, gamma) = with(json!({"from": "hull", "to": "hull"}));
    assert_eq!((e, gamma), ([Some(1.0), Some(2.0), Some(3.0)], 1.0));
}

#[test]
fn names_and_times_of_a_question_are_checked() {
    let deployment = Deployment {
        steps: 10,
        trials: 100_000,
        frames: Some(Arc::new(loaded("names", &[("frames.toml", TREE)]))),
    };
    let faults = |question: Value| codes(&ask_at(&deployment, question).expect_err("faults"));
    let e = json!([1, 2, 3]);
    assert_eq!(
        faults(json!({"e": e, "from": "mst", "to": "hll"})),
        [Code::UnknownFrame, Code::UnknownFrame]
    );
    assert_eq!(
        faults(json!({"e": e, "from": "mast"})),
        [Code::MissingField]
    );
    assert_eq!(
        faults(json!({"e": e, "velocity": [0, 0, 0], "to": "mast", "time": 3})),
        [Code::ConflictingFields, Code::ConflictingFields]
    );
    assert_eq!(
        faults(json!({"e": e, "from": "mast", "to": "hull", "velocity": [0, 0, 0]})),
        [Code::ConflictingFields]
    );
    assert_eq!(
        faults(json!({"e": e, "from": "mast", "to": "hull", "time": 3})),
        [Code::WrongTime]
    );
    assert_eq!(
        faults(json!({"e": e, "from": "mast", "to": "hull", "time": "2031-02-29T00:00:00Z"})),
        [Code::WrongTime]
    );
    let alone = Deployment {
        steps: 10,
        trials: 100_000,
        frames: None,
    };
    let found =
        ask_at(&alone, json!({"e": e, "from": "mast", "to": "hull"})).expect_err("no catalogue");
    assert_eq!(codes(&found), [Code::UnknownFrame]);
}

const TRACKED: &str = "
epoch = \"T0\"
[units]
velocity = \"km/s\"
[frames.ground]
[frames.craft]
parent = \"ground\"
track = \"craft.csv\"
";

/// From rest to 100 km/s, and a quarter turn about z, in ten seconds.
const CRAFT: &str = "time,vx,vy,vz,qw,qx,qy,qz\n0,0,0,0,1,0,0,0\n\
                     10,100,0,0,0.7071067811865476,0,0,0.7071067811865476\n";

#[test]
fn a_track_is_interpolated() {
    let catalogue = loaded("track", &[("frames.toml", TRACKED), ("craft.csv", CRAFT)]);
    let answer = ask(
        catalogue,
        json!({"e": [1, 2, 3], "b": [0, 0, 0], "from": "ground", "to": "craft", "time": 2.5,
               "units": {"velocity": "km/s"}}),
    )
    .expect("an answer");
    assert_eq!(answer.net.velocity, [25.0, 0.0, 0.0]);
    let turned = 2.0 * answer.net.rotation.z.atan2(answer.net.rotation.w);
    assert!((turned.to_degrees() - 22.5).abs() < 1e-13, "{turned}");
    assert!(answer.notices.is_empty(), "{:?}", answer.notices);
}

#[test]
fn times_outside_a_track_are_refused_or_extrapolated_with_a_notice() {
    let question = |time: Value| {
        json!({"e": [1, 2, 3], "from": "ground", "to": "craft", "time": time,
               "units": {"velocity": "km/s"}})
    };
    let strict = || loaded("strict", &[("frames.toml", TRACKED), ("craft.csv", CRAFT)]);
    for time in [-0.5, 10.5] {
        let faults = ask(strict(), question(json!(time))).expect_err("outside");
        assert_eq!(codes(&faults), [Code::TimeOutsideTrack]);
    }
    let faults = ask(strict(), question(Value::Null)).expect_err("no time");
    assert_eq!(codes(&faults), [Code::TimeNeeded]);
    let text = format!("{TRACKED}extrapolate = true\n");
    let free = || {
        loaded(
            "free",
            &[("frames.toml", text.as_str()), ("craft.csv", CRAFT)],
        )
    };
    for (time, vx, degrees) in [
        (-5.0, -50.0, -45.0),
        (12.0, 120.0, 108.0),
        (10.0, 100.0, 90.0),
    ] {
        let answer = ask(free(), question(json!(time))).expect("an answer");
        assert!(
            (answer.net.velocity[0] - vx).abs() < 1e-12,
            "{:?}",
            answer.net
        );
        let turned = 2.0 * answer.net.rotation.z.atan2(answer.net.rotation.w);
        assert!((turned.to_degrees() - degrees).abs() < 1e-12, "{turned}");
        let told = answer
            .notices
            .iter()
            .any(|notice| notice.code == "extrapolated_time");
        assert_eq!(told, time != 10.0);
    }
    let faults = ask(free(), question(json!(1e9))).expect_err("past c");
    assert_eq!(codes(&faults), [Code::FasterThanLight]);
}

#[test]
fn a_walker_finds_the_same_as_a_search() {
    let mut track = String::from("time,vx,vy,vz\n");
    for n in 0..500 {
        track += &format!("{},{},0,0\n", f64::from(n) * 0.7, (n * 7919) % 400);
    }
    let catalogue = loaded("walker", &[("frames.toml", TRACKED), ("craft.csv", &track)]);
    let (from, to) = (
        catalogue.find("ground").unwrap(),
        catalogue.find("craft").unwrap(),
    );
    let walk = catalogue.walk(from, to).expect("a way");
    let mut walker = Walker::new(walk.clone());
    // Forwards in small and large strides, then back.
    let times = (0..2000)
        .map(|n| f64::from(n) * 0.17)
        .chain([300.0, 4.0, 4.7, 100.0]);
    for seconds in times {
        let time = Time::from_seconds(seconds);
        let met = walker.at(time).expect("inside").way;
        let sought = walk.at(time).expect("inside").way;
        assert_eq!(met.matrix(), sought.matrix(), "{seconds}");
    }
}

#[test]
fn a_turning_frame_turns_by_its_phase_and_rate() {
    let catalogue = "[units]\nangle = \"deg\"\nangular_velocity = \"circ/s\"\n[frames.a]\n\
                     [frames.b]\nparent = \"a\"\nposition = [100, 0, 0]\nturning = { \
                     angular_velocity = [0, 0, 4], epoch = 2031-03-02T05:10:00.5Z, phase = 30 }\n";
    let deployment = Deployment {
        steps: 10,
        trials: 100_000,
        frames: Some(Arc::new(loaded("turning", &[("frames.toml", catalogue)]))),
    };
    let at = |time: &str| {
        let question =
            json!({"e": [1, 0, 0], "b": [0, 0, 1], "from": "a", "to": "b", "time": time});
        ask_at(&deployment, question).expect("an answer").net
    };
    // A year of revolutions and an eighth of a second later: half a turn more, to the last digits.
    for (time, degrees) in [
        ("2031-03-02T05:10:00.5Z", 30.0),
        ("2031-03-02T07:10:00.5+02:00", 30.0),
        ("2032-03-01T05:10:00.625Z", 210.0),
        ("2031-03-02T05:10:00.5000000000000000000000000000001Z", 30.0),
    ] {
        let net = at(time);
        let turned = 2.0 * net.rotation.z.atan2(net.rotation.w);
        let off = (turned.to_degrees() - degrees).rem_euclid(360.0);
        assert!(off.min(360.0 - off) < 1e-13, "{time}: {turned}");
        // The point moves along the turned y axis.
        let [x, y] = [net.velocity[0], net.velocity[1]];
        let speed = 100.0 * 8.0 * std::f64::consts::PI;
        let (sin, cos) = f64::to_radians(degrees + 90.0).sin_cos();
        assert!(
            (x - speed * cos).hypot(y - speed * sin) < 1e-12 * speed,
            "{time}: {x}, {y}"
        );
    }
}

const SENSORS: &str = "
[units]
e = \"mV/m\"
b = \"nT\"
[frames.body]
[frames.probe]
parent = \"body\"
sensor.e = { axes = [\"x\", \"y\"], matrix = [[500, -2, 0], [1, 400, 0], [0, 0, 1]], offset = [0.25, -0.5, 0] }
sensor.b = { matrix = [[2, 0, 0.5], [0, 2, 0], [0, 0, 2]], offset = [1, 2, 3] }
";

#[test]
fn a_sensor_is_corrected_before_anything_else() {
    let deployment = Deployment {
        steps: 10,
        trials: 100_000,
        frames: Some(Arc::new(loaded("sensors", &[("frames.toml", SENSORS)]))),
    };
    let ask = |question: Value| ask_at(&deployment, question);
    let raw = json!({"e": [1.25, 0.5, null], "b": [11, 12, 13], "from": "probe", "to": "body"});
    let answer = ask(raw.clone()).expect("an answer");
    // By hand: 500·1 − 2·1 = 498, 1·1 + 400·1 = 401; 2·10 + 0.5·10 = 25, 20, 20.
    assert_eq!(answer.e, [Some(498.0), Some(401.0), None]);
    assert_eq!(answer.b, [Some(25.0), Some(20.0), Some(20.0)]);
    assert_eq!((&*answer.units.e, &*answer.units.b), ("mV/m", "nT"));
    // A unit that the question names is that of the answer; raw numbers stay raw.
    let mut in_units = raw.clone();
    in_units["units"] = json!({"e": "V/m"});
    let answer = ask(in_units).expect("an answer");
    assert_eq!(answer.e[0], Some(0.498));
    assert_eq!((&*answer.units.e, &*answer.units.b), ("V/m", "nT"));
    // E_z from E·B = 0: −(498·25 + 401·20)/20 = −1023.5.
    let mut assumed = raw.clone();
    assumed["assume"] = json!({"e_dot_b_zero": {}});
    let answer = ask(assumed).expect("an answer");
    assert_eq!(answer.e[2], Some(-1023.5));
    assert_eq!(answer.notices[0].code, "e_dot_b_assumed");
    // As a target the sensor gives fields on its axes, not raw numbers.
    let back = json!({"e": [498, 401, 0], "from": "body", "to": "probe", "units": {"e": "mV/m"}});
    assert_eq!(ask(back).expect("an answer").e[0], Some(498.0));
    // A raw number that is missing takes with it what it is mixed into.
    let partial = json!({"b": [11, null, null], "from": "probe", "to": "body"});
    assert_eq!(ask(partial).expect("an answer").b, [None, None, None]);
    let partial = json!({"b": [null, 12, 13], "from": "probe", "to": "body"});
    assert_eq!(
        ask(partial).expect("an answer").b,
        [None, Some(20.0), Some(20.0)]
    );
    let third = json!({"e": [1, 1, 1], "from": "probe", "to": "body"});
    assert_eq!(
        codes(&ask(third).expect_err("no z")),
        [Code::AxisNotMeasured]
    );
}

#[test]
fn hashes_tell_files_apart_and_nothing_else() {
    let files = [("frames.toml", TRACKED), ("craft.csv", CRAFT)];
    let (one, other) = (loaded("hash_one", &files), loaded("hash_other", &files));
    assert_eq!(one.hash, other.hash);
    let question = || json!({"e": [1, 2, 3], "from": "ground", "to": "craft", "time": 0.1});
    let text = |catalogue| {
        let answer = ask(catalogue, question()).expect("an answer");
        assert_eq!(
            answer.provenance.frames.as_deref(),
            Some(&*loaded("hash_one", &files).hash)
        );
        serde_json::to_string(&answer).expect("JSON")
    };
    assert_eq!(text(one), text(other));
    let changed = [("frames.toml", TRACKED), ("craft.csv", CRAFT.trim_end())];
    assert_ne!(
        loaded("hash_trimmed", &changed).hash,
        loaded("hash_one", &files).hash
    );
}
