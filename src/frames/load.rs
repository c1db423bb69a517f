//! Reading a catalogue whole: every fault at once, and a hash over the file and its tracks.

use std::fs::File;
use std::io::{self, Read};
use std::path::{Path, PathBuf};

use sha2::{Digest, Sha256};

use super::catalogue::{Catalogue, Frame, Link};
use super::fault::{LoadFault, Reason};
use super::frame::{self, Draft, DraftLink};
use super::time::Clock;
use super::track::Track;
use super::{table, tree};
use crate::chain;
use crate::document::{Code, Fault, Faults, Place, Segment, Toml};
use crate::physics::boost::Motion;
use crate::units::{Quantity, Units};

/// What stands in the file beside its frames.
struct Head {
    about: Option<String>,
    epoch: Option<String>,
    units: Units,
}

/// Loads a catalogue and the tracks it names, whose paths are relative to it.
///
/// # Errors
/// Every fault found, in the order of the files.
pub fn load(path: &Path) -> Result<Catalogue, Vec<LoadFault>> {
    let whole = |code, detail: String| {
        vec![LoadFault {
            file: path.to_owned(),
            line: None,
            frame: None,
            reason: Reason::new(code, detail),
        }]
    };
    let bytes = std::fs::read(path)
        .map_err(|error| whole(Code::UnreadableFile, format!("cannot be read: {error}")))?;
    let text = str::from_utf8(&bytes)
        .map_err(|error| whole(Code::Syntax, format!("not UTF-8: {error}")))?;
    let toml = Toml::parse(text).map_err(|faults| {
        let faults = faults.into_iter().map(|fault| LoadFault {
            file: path.to_owned(),
            line: Some(fault.line as u64),
            frame: None,
            reason: Reason::new(fault.code, fault.detail),
        });
        faults.collect::<Vec<_>>()
    })?;
    let mut noted = Faults::default();
    let (head, drafts) = read(&toml, &mut noted);
    let mut faults: Vec<LoadFault> = noted
        .0
        .iter()
        .map(|fault| placed(fault, &toml, path))
        .collect();
    let parents = tree::grow(&drafts).unwrap_or_else(|found| {
        for (frame, reason) in found {
            let name = &drafts[frame].name;
            let member = |name: &str| crate::document::Path::default().field("frames").field(name);
            faults.push(LoadFault {
                file: path.to_owned(),
                line: Some(toml.line(&member(name).field("parent")) as u64),
                frame: Some(name.clone()),
                reason,
            });
        }
        Vec::new()
    });
    // The faults of the catalogue itself in the order of its lines, those of the tracks after them.
    faults.sort_by_key(|fault| fault.line);
    let mut hash = Sha256::new();
    hash.update(&bytes);
    let folder = path.parent().unwrap_or(Path::new(""));
    let mut frames = Vec::with_capacity(drafts.len());
    for (i, draft) in drafts.into_iter().enumerate() {
        let Some(link) = draft.link else { continue };
        match link_of(link, &draft.name, folder, &head, &mut hash) {
            Ok(link) => frames.push(Frame {
                name: draft.name,
                about: draft.about,
                parent: parents.get(i).copied().flatten(),
                link,
                sensor: draft.sensor,
            }),
            Err(found) => faults.extend(found),
        }
    }
    if !faults.is_empty() {
        return Err(faults);
    }
    let digest: String = hash
        .finalize()
        .iter()
        .map(|byte| format!("{byte:02x}"))
        .collect();
    let hash = format!("sha256:{digest}");
    let clock = head.clock();
    Ok(Catalogue::new(
        head.about, head.epoch, clock, head.units, frames, hash,
    ))
}

impl Head {
    /// Times are seconds where there is an epoch to count them from.
    fn clock(&self) -> Clock {
        if self.epoch.is_some() {
            Clock::Seconds
        } else {
            Clock::Calendar
        }
    }
}

fn read(toml: &Toml, faults: &mut Faults) -> (Head, Vec<Draft>) {
    let (node, root) = (toml.node(), Place::ROOT);
    let mut head = Head {
        about: None,
        epoch: None,
        units: Units::default(),
    };
    let known = ["about", "epoch", "units", "frames"];
    let Some(members) = faults.members(&node, &root, &known) else {
        return (head, Vec::new());
    };
    let mut text = |name| {
        let node = members.get(name)?;
        faults.text(node, &root.field(name)).map(str::to_owned)
    };
    (head.about, head.epoch) = (text("about"), text("epoch"));
    if let Some(node) = members.get("units") {
        let place = root.field("units");
        head.units =
            chain::units(node, &place, &Quantity::ALL, head.units, faults).unwrap_or(head.units);
    }
    let place = root.field("frames");
    let Some(node) = faults.needed(members, &root, "frames") else {
        return (head, Vec::new());
    };
    let Some(frames) = faults.any_members(node, &place, "a table of frames by name") else {
        return (head, Vec::new());
    };
    let drafts: Vec<Draft> = frames
        .iter()
        .map(|(name, node)| {
            let place = place.field(name);
            frame::read(name, node, &place, &head.units, head.clock(), faults)
        })
        .collect();
    if drafts.is_empty() {
        faults.note(
            &place,
            Code::MissingField,
            "a catalogue has at least one frame",
        );
    }
    (head, drafts)
}

/// A fault with its line, its frame and the rest of its path.
fn placed(fault: &Fault, toml: &Toml, file: &Path) -> LoadFault {
    let path = fault.path.clone().unwrap_or_default();
    let (frame, rest) = match path.0.as_slice() {
        [Segment::Field(frames), Segment::Field(name), rest @ ..] if frames == "frames" => {
            (Some(name.clone()), rest)
        }
        rest => (None, rest),
    };
    let rest = crate::document::Path(rest.to_vec()).parameter();
    let detail = if rest.is_empty() {
        fault.detail.clone()
    } else {
        format!("{rest}: {}", fault.detail)
    };
    LoadFault {
        file: file.to_owned(),
        line: Some(toml.line(&path) as u64),
        frame,
        reason: Reason::new(fault.code, detail),
    }
}

fn link_of(
    link: DraftLink,
    name: &str,
    folder: &Path,
    head: &Head,
    hash: &mut Sha256,
) -> Result<Link, Vec<LoadFault>> {
    let fault = |file: PathBuf, line, reason| LoadFault {
        file,
        line,
        frame: Some(name.to_owned()),
        reason,
    };
    match link {
        DraftLink::Steps(steps) => Ok(Link::Steps(steps)),
        DraftLink::Turning(turning) => Ok(Link::Turning(turning)),
        DraftLink::Track {
            file,
            max_gap,
            extrapolate,
        } => {
            let path = folder.join(&file);
            let opened = File::open(&path).map_err(|error| {
                let detail = format!("cannot be read: {error}");
                vec![fault(
                    path.clone(),
                    None,
                    Reason::new(Code::UnreadableFile, detail),
                )]
            })?;
            let track = Track {
                file,
                rows: Vec::new(),
                uncertainties: Vec::new(),
                moves: false,
                turns: false,
                beta: Motion::to_beta(head.units.si(Quantity::Velocity)),
                radians: head.units.si(Quantity::Angle),
                extrapolate,
                mended: 0.0,
                clock: head.clock(),
            };
            let source = Hashing {
                source: opened,
                hash,
            };
            let track = table::read(source, track, max_gap).map_err(|found| {
                let named = |(line, reason)| fault(path.clone(), line, reason);
                found.into_iter().map(named).collect::<Vec<_>>()
            })?;
            Ok(Link::Track(track))
        }
    }
}

/// A file whose bytes are hashed as they are read.
struct Hashing<'h> {
    source: File,
    hash: &'h mut Sha256,
}

impl Read for Hashing<'_> {
    fn read(&mut self, buffer: &mut [u8]) -> io::Result<usize> {
        let count = self.source.read(buffer)?;
        self.hash.update(&buffer[..count]);
        Ok(count)
    }
}
