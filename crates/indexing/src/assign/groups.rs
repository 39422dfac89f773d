//! Reflections that stand too close to be told apart make one line.

use super::geometry::{Member, Positions};

/// A reflection that the structure allows.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Predicted {
    /// Indices.
    pub hkl: [i32; 3],
    /// Intensity on any scale, if the structure is known; weights the mean position of a common line.
    pub intensity: Option<f64>,
}

/// Lines of a cell, by rising angle.
#[derive(Clone, Debug, Default)]
pub(super) struct Groups {
    /// Reflections of all groups, group by group: index into the predicted ones.
    pub reflections: Vec<usize>,
    /// The same with weights, for positions; reflections that coincide for every cell stand once.
    pub members: Vec<Member>,
    pub spans: Vec<Span>,
}

#[derive(Clone, Copy, Debug)]
pub(super) struct Span {
    first: usize,
    len: usize,
    member_first: usize,
    member_len: usize,
    /// Weighted standard deviation of the members' positions, radians.
    pub spread: f64,
}

impl Groups {
    /// Groups reflections nearer than `merge` (radians 2θ) to their neighbour; those in `apart` stay alone.
    pub fn new(positions: &Positions<'_>, predicted: &[Predicted], merge: f64, apart: &[bool]) -> Self {
        let mut order: Vec<(f64, usize)> = predicted
            .iter()
            .enumerate()
            .filter_map(|(i, p)| Some((positions.two_theta(p.hkl.map(f64::from))?, i)))
            .collect();
        order.sort_unstable_by(|x, y| x.0.total_cmp(&y.0).then(x.1.cmp(&y.1)));
        let mut groups = Self::default();
        let mut start = 0;
        while start < order.len() {
            let mut end = start + 1;
            // Measured from the first member, so that a dense pattern does not chain into one line.
            while end < order.len()
                && order[end].0 - order[start].0 < merge
                && (order[end].0 - order[start].0 < 1e-9 || !(apart[order[end].1] || apart[order[start].1]))
            {
                end += 1;
            }
            groups.push(positions, predicted, &order[start..end]);
            start = end;
        }
        groups
    }

    fn push(&mut self, positions: &Positions<'_>, predicted: &[Predicted], run: &[(f64, usize)]) {
        let (first, member_first) = (self.reflections.len(), self.members.len());
        let known = run.iter().all(|(_, i)| predicted[*i].intensity.is_some_and(|x| x > 0.0));
        for (_, i) in run {
            self.reflections.push(*i);
            let weight = if known { predicted[*i].intensity.unwrap_or(1.0) } else { 1.0 };
            let member = Member::new(predicted[*i].hkl, weight);
            let twin = run.len() > 1
                && self.members[member_first..].iter_mut().any(|other| {
                    let same = match (positions.line(other.h), positions.line(member.h)) {
                        (Some(x), Some(y)) => {
                            (x.two_theta - y.two_theta).abs() < 1e-11
                                && x.by_cell.iter().zip(y.by_cell).all(|(p, q)| (p - q).abs() < 1e-9)
                        }
                        _ => false,
                    };
                    if same {
                        other.weight += weight;
                    }
                    same
                });
            if !twin {
                self.members.push(member);
            }
        }
        let members = &self.members[member_first..];
        let spread = if members.len() < 2 { 0.0 } else { spread(positions, members) };
        self.spans.push(Span { first, len: run.len(), member_first, member_len: members.len(), spread });
    }

    pub fn members(&self, group: usize) -> &[Member] {
        let span = &self.spans[group];
        &self.members[span.member_first..span.member_first + span.member_len]
    }

    pub fn reflections(&self, group: usize) -> &[usize] {
        let span = &self.spans[group];
        &self.reflections[span.first..span.first + span.len]
    }
}

fn spread(positions: &Positions<'_>, members: &[Member]) -> f64 {
    let Some(mean) = positions.group(members) else { return 0.0 };
    let total: f64 = members.iter().map(|m| m.weight).sum();
    let square: f64 =
        members.iter().filter_map(|m| Some(m.weight * (positions.two_theta(m.h)? - mean.two_theta).powi(2))).sum();
    (square / total).sqrt()
}
