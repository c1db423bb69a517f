//! The frames as a tree: every frame but one has a parent, and all lead to that one.

use super::fault::Reason;
use super::frame::Draft;
use crate::document::Code;

/// The parents of the frames, by place in the file.
pub(super) type Parents = Vec<Option<usize>>;

/// Finds the parents by name.
///
/// # Errors
/// Every fault of the tree, each with the place of its frame: a parent that is not there, a circle
/// of parents, a second root, a sensor with children.
pub(super) fn grow(drafts: &[Draft]) -> Result<Parents, Vec<(usize, Reason)>> {
    let mut faults = Vec::new();
    let mut fault = |frame: usize, code, detail: String| {
        faults.push((frame, Reason::new(code, detail)));
    };
    let find = |name: &str| drafts.iter().position(|draft| draft.name == name);
    let mut parents: Parents = vec![None; drafts.len()];
    for (i, draft) in drafts.iter().enumerate() {
        let Some(name) = &draft.parent else { continue };
        match find(name) {
            Some(parent) => parents[i] = Some(parent),
            None => {
                let detail = format!("its parent {name:?} is not among the frames of this file");
                fault(i, Code::UnknownParent, detail);
            }
        }
    }
    for circle in circles(&parents) {
        let names: Vec<&str> = circle.iter().map(|i| drafts[*i].name.as_str()).collect();
        let detail = format!(
            "{} and back to {} is a circle of parents; one of them must hang from elsewhere",
            names.join(" from "),
            names[0]
        );
        fault(circle[0], Code::FrameCycle, detail);
    }
    let mut roots = drafts
        .iter()
        .enumerate()
        .filter(|(_, draft)| draft.parent.is_none());
    if let Some((_, first)) = roots.next() {
        for (i, _) in roots {
            let detail = format!(
                "it has no parent, and neither has {:?}: the two trees never meet, and nothing \
                 leads from one to the other. Give it a parent",
                first.name
            );
            fault(i, Code::SeveralRoots, detail);
        }
    }
    for (i, parent) in parents.iter().enumerate() {
        if let Some(parent) = parent.filter(|parent| drafts[*parent].sensor.is_some()) {
            let detail = format!(
                "its parent {:?} is a sensor, and sensors are leaves; hang both from the same \
                 frame",
                drafts[parent].name
            );
            fault(i, Code::SensorNotLeaf, detail);
        }
    }
    if faults.is_empty() {
        Ok(parents)
    } else {
        Err(faults)
    }
}

/// The circles of parents, each once, each from its first frame in the file.
fn circles(parents: &Parents) -> Vec<Vec<usize>> {
    // Which walk came by: walks that meet an earlier one find nothing new.
    let mut seen = vec![usize::MAX; parents.len()];
    let mut circles = Vec::new();
    for start in 0..parents.len() {
        let mut at = Some(start);
        while let Some(i) = at.filter(|i| seen[*i] == usize::MAX) {
            seen[i] = start;
            at = parents[i];
        }
        if let Some(meeting) = at.filter(|i| seen[*i] == start) {
            let next = |i: &usize| parents[*i].filter(|next| *next != meeting);
            let mut circle: Vec<usize> = std::iter::successors(Some(meeting), next).collect();
            let first = (0..circle.len()).min_by_key(|i| circle[*i]).unwrap_or(0);
            circle.rotate_left(first);
            circles.push(circle);
        }
    }
    circles
}

/// The way between two frames: up from the first, then down to the second; neither holds the frame
/// where they meet.
pub(super) fn way(parents: &Parents, from: usize, to: usize) -> (Vec<usize>, Vec<usize>) {
    let ancestors = |frame: usize| -> Vec<usize> {
        std::iter::successors(Some(frame), |i| parents[*i]).collect()
    };
    let (mut up, mut down) = (ancestors(from), ancestors(to));
    while let (Some(a), Some(b)) = (up.last(), down.last()) {
        if a != b {
            break;
        }
        up.pop();
        down.pop();
    }
    down.reverse();
    (up, down)
}
