//! Places for labels above a curve: none overlaps another, none leaves the frame, the strongest choose first.

use crate::svg::tenths;

/// A rectangle in px, y downwards.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) struct Rect {
    pub left: f64,
    pub top: f64,
    pub right: f64,
    pub bottom: f64,
}

impl Rect {
    /// Whether two rectangles come closer than `gap` to each other.
    pub(crate) fn touches(&self, other: &Self, gap: f64) -> bool {
        self.left < other.right + gap
            && other.left < self.right + gap
            && self.top < other.bottom + gap
            && other.top < self.bottom + gap
    }

    /// Whether `other` lies wholly inside.
    pub(crate) fn holds(&self, other: &Self) -> bool {
        other.left >= self.left && other.right <= self.right && other.top >= self.top && other.bottom <= self.bottom
    }
}

/// A label that wants to stand above a point.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) struct Wish {
    /// What is labelled, px.
    pub x: f64,
    /// Its upper end, px.
    pub y: f64,
    /// Size of the box that the label fills, px.
    pub width: f64,
    /// Size of the box that the label fills, px.
    pub height: f64,
}

/// Where a label stands.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) struct Place {
    /// The box of the label.
    pub rect: Rect,
    /// Foot of the leader: the point that is labelled, px.
    pub foot: (f64, f64),
}

impl Place {
    /// Path data of a line to what is labelled, in canvas units; none where the label stands close above it.
    pub(crate) fn leader_line(&self) -> Option<String> {
        let middle = 0.5 * (self.rect.left + self.rect.right);
        let close = (middle - self.foot.0).abs() <= 0.05 && self.foot.1 - self.rect.bottom <= LIFT + 3.0;
        let [x0, y0, x1, y1] = [self.foot.0, self.foot.1 - 2.0, middle, self.rect.bottom + 2.0].map(tenths);
        (!close).then(|| format!("M{x0} {y0}L{x1} {y1}"))
    }
}

/// Least distance of two labels, and of a label to the frame, px.
pub(crate) const GAP: f64 = 2.0;
/// Distance of a label from what lies below it, px.
const LIFT: f64 = 5.0;
/// Longest upright leader above what lies below a label, px: beyond it the eye loses the line.
const RAISE: f64 = 90.0;
/// What stands so near to the foot of a leader belongs to it, px.
const FOOT: f64 = 3.0;
/// Room for a slanted leader, px.
const LEADER: f64 = 9.0;

/// Gives each wish, in order (strongest first), the nearest free place, or none.
///
/// `frame`: labels stay inside. `skyline(x0, x1)`: the highest thing (smallest y, px) between two x.
pub(crate) fn place(frame: &Rect, wishes: &[Wish], skyline: impl Fn(f64, f64) -> f64) -> Vec<Option<Place>> {
    let mut taken: Vec<Place> = Vec::new();
    wishes
        .iter()
        .map(|wish| {
            let place = candidates(frame, wish, &skyline)
                .into_iter()
                .chain(above_others(frame, wish, &skyline, &taken))
                .find(|place| taken.iter().all(|other| apart(place, other)))?;
            taken.push(place);
            Some(place)
        })
        .collect()
}

/// Places of one label by rising distance from what it names: straight above, or aside with a slanted leader where
/// something higher stands close.
fn candidates(frame: &Rect, wish: &Wish, skyline: &impl Fn(f64, f64) -> f64) -> Vec<Place> {
    let inner = inner(frame);
    let mut places: Vec<(f64, Place)> = [0.0, -0.7, 0.7, -1.4, 1.4, -2.1, 2.1, -2.8, 2.8]
        .into_iter()
        .map(|shift: f64| {
            let left = wish.x + (shift - 0.5) * wish.width;
            let right = left + wish.width;
            let leader = if shift.abs() > 0.0 { LEADER } else { 0.0 };
            // Aside, the leader must not cross what stands between the label and its foot.
            let between = if shift > 0.0 { (wish.x + FOOT, right) } else { (left, wish.x - FOOT) };
            let below = if shift.abs() > 0.0 {
                skyline(left, right).min(skyline(between.0, between.1))
            } else {
                skyline(left, right)
            };
            let bottom = below.min(wish.y - leader) - LIFT;
            let rect = Rect { left, top: bottom - wish.height, right, bottom };
            let distance = (wish.y - bottom) + 1.5 * shift.abs() * wish.width;
            (distance, Place { rect, foot: (wish.x, wish.y) })
        })
        .filter(|(_, place)| inner.holds(&place.rect))
        .collect();
    places.sort_by(|a, b| a.0.total_cmp(&b.0));
    places.into_iter().map(|(_, place)| place).collect()
}

/// Places straight above the point and above a label that is already there, the lowest first: the last resort of a line
/// between two stronger ones.
fn above_others(frame: &Rect, wish: &Wish, skyline: &impl Fn(f64, f64) -> f64, taken: &[Place]) -> Vec<Place> {
    let (left, right) = (wish.x - 0.5 * wish.width, wish.x + 0.5 * wish.width);
    let lowest = skyline(left, right).min(wish.y) - LIFT;
    let crowding = taken.iter().filter(|other| other.rect.left < right + GAP && left - GAP < other.rect.right);
    let mut places: Vec<Place> = crowding
        .map(|other| lowest.min(other.rect.top - GAP - 0.1))
        .filter(|bottom| lowest - bottom <= RAISE)
        .map(|bottom| Rect { left, top: bottom - wish.height, right, bottom })
        .filter(|rect| inner(frame).holds(rect))
        .map(|rect| Place { rect, foot: (wish.x, wish.y) })
        .collect();
    places.sort_by(|a, b| b.rect.bottom.total_cmp(&a.rect.bottom));
    places
}

/// Where labels may stand.
fn inner(frame: &Rect) -> Rect {
    Rect { left: frame.left + GAP, top: frame.top + GAP, right: frame.right - GAP, bottom: frame.bottom }
}

/// Whether neither label nor leader of one place meets the label of the other. Leaders may share their foot: lines that
/// overlap are labelled at one point.
fn apart(one: &Place, other: &Place) -> bool {
    !one.rect.touches(&other.rect, GAP)
        && !leader(one).touches(&other.rect, 0.5)
        && !leader(other).touches(&one.rect, 0.5)
}

/// The box of the leader.
fn leader(place: &Place) -> Rect {
    let middle = 0.5 * (place.rect.left + place.rect.right);
    Rect {
        left: middle.min(place.foot.0),
        top: place.rect.bottom,
        right: middle.max(place.foot.0),
        bottom: place.foot.1.max(place.rect.bottom),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    proptest! {
        #![proptest_config(ProptestConfig::with_cases(300))]
        #[test]
        fn labels_are_apart_from_each_other_inside_the_frame_and_above_the_curve(
            wishes in proptest::collection::vec((0.0_f64..900.0, 5.0_f64..40.0, 5.0_f64..120.0), 0..200),
            curve in proptest::collection::vec(0.0_f64..300.0, 901),
        ) {
            let frame = Rect { left: 0.0, top: 0.0, right: 900.0, bottom: 300.0 };
            let wishes: Vec<Wish> = wishes.into_iter().map(|(x, width, height)| Wish { x, y: 300.0, width, height }).collect();
            let skyline = |from: f64, to: f64| {
                let (from, to) = (from.min(to).clamp(0.0, 900.0) as usize, to.clamp(0.0, 900.0) as usize);
                curve[from..=to.max(from)].iter().copied().fold(300.0, f64::min)
            };
            let places = place(&frame, &wishes, skyline);
            let boxes: Vec<Rect> = places.iter().flatten().map(|place| place.rect).collect();
            for (index, one) in boxes.iter().enumerate() {
                prop_assert!(frame.holds(one));
                prop_assert!(one.bottom <= skyline(one.left, one.right));
                prop_assert!(boxes[..index].iter().all(|other| !one.touches(other, 0.0)));
            }
        }
    }

    #[test]
    fn of_two_labels_that_crowd_each_other_the_first_stands_straight_above() {
        let frame = Rect { left: 0.0, top: 0.0, right: 100.0, bottom: 100.0 };
        let wish = Wish { x: 50.0, y: 80.0, width: 10.0, height: 30.0 };
        let places = place(&frame, &[wish, Wish { x: 57.0, ..wish }], |_, _| 80.0);
        let first = places[0].expect("the frame is empty");
        assert!((first.rect.left - 45.0).abs() < 1e-9);
        assert!(places[1].is_some_and(|second| !second.rect.touches(&first.rect, GAP - 1e-9)));
    }

    #[test]
    fn a_label_that_is_taller_than_the_room_above_is_left_out() {
        let frame = Rect { left: 0.0, top: 0.0, right: 100.0, bottom: 100.0 };
        let places = place(&frame, &[Wish { x: 50.0, y: 80.0, width: 10.0, height: 90.0 }], |_, _| 80.0);
        assert_eq!(places, [None]);
    }
}
