//! A catalogue as text, for `lodeframe check`.

use std::fmt;

use super::catalogue::{Catalogue, Frame, Link};
use super::sensor::Channel;

impl fmt::Display for Catalogue {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        for root in self.children(None) {
            let mut open = vec![(root, String::new(), String::new())];
            // Depth first, without recursion: a chain of frames may be long.
            while let Some((i, lead, indent)) = open.pop() {
                let frame = &self.frames()[i];
                write!(f, "{lead}{}", frame.name)?;
                self.describe(frame, f)?;
                let children: Vec<usize> = self.children(Some(i)).collect();
                let last = children.len().wrapping_sub(1);
                for (k, child) in children.into_iter().enumerate().rev() {
                    let (branch, below) = if k == last {
                        ("└─ ", "   ")
                    } else {
                        ("├─ ", "│  ")
                    };
                    open.push((
                        child,
                        format!("{indent}{branch}"),
                        format!("{indent}{below}"),
                    ));
                }
            }
        }
        let frames = self.frames().len();
        write!(
            f,
            "{frames} frame{}, {}",
            if frames == 1 { "" } else { "s" },
            self.hash
        )
    }
}

impl Catalogue {
    fn describe(&self, frame: &Frame, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        if let Some(about) = &frame.about {
            write!(f, ": {about}")?;
        }
        match &frame.link {
            Link::Steps(steps) if steps.is_empty() => {}
            Link::Steps(steps) if steps.len() == 1 => write!(f, " (1 step)")?,
            Link::Steps(steps) => write!(f, " ({} steps)", steps.len())?,
            Link::Turning(turning) => {
                let [x, y, z] = turning.angular_velocity;
                let unit = self.units.get(crate::units::Quantity::AngularVelocity).code;
                write!(f, " (turning, [{x}, {y}, {z}] {unit})")?;
            }
            Link::Track(track) => {
                let [first, last] = track.valid().map(|time| time.display(self.clock));
                let rows = track.rows.len();
                write!(f, " (track {}, {rows} rows, {first} to {last})", track.file)?;
                if track.mended > 1e-9 {
                    write!(f, " (attitudes off by {:.1e}, normalised)", track.mended)?;
                }
            }
        }
        let sensor = frame.sensor.unwrap_or_default();
        for (name, channel) in [("E", sensor.e), ("B", sensor.b)] {
            if let Some(channel) = channel {
                write!(f, " (reads {name} on {})", axes(&channel))?;
            }
        }
        writeln!(f)
    }
}

fn axes(channel: &Channel) -> String {
    let has = ["x", "y", "z"].into_iter().zip(channel.axes);
    has.filter(|(_, has)| *has).map(|(name, _)| name).collect()
}
