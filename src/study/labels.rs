//! Places names beside curves, so that nobody has to match colours with a legend.
//!
//! Everything is in axis units: the caller says how wide and how high a name is on its axes, and draws it where it
//! is told. A name never covers a name or a taken area as long as there is room; after that it keeps off the curves,
//! stays close to its own and away from its neighbours.

/// A rectangle in axis units.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Area {
    /// Smallest x.
    pub left: f64,
    /// Largest x.
    pub right: f64,
    /// Smallest y.
    pub bottom: f64,
    /// Largest y.
    pub top: f64,
}

impl Area {
    /// A rectangle about its middle.
    pub fn about(x: f64, y: f64, (width, height): (f64, f64)) -> Self {
        let (w, h) = (width / 2.0, height / 2.0);
        Self { left: x - w, right: x + w, bottom: y - h, top: y + h }
    }

    /// The middle.
    pub fn middle(&self) -> (f64, f64) {
        ((self.left + self.right) / 2.0, (self.bottom + self.top) / 2.0)
    }

    /// Whether the two share more than an edge.
    pub fn overlaps(&self, other: &Area) -> bool {
        self.left < other.right
            && other.left < self.right
            && self.bottom < other.top
            && other.bottom < self.top
    }

    /// The rectangle shifted, as little as need be, into another; held at the left and bottom when it is too large.
    pub fn moved_into(&self, frame: Area) -> Self {
        let dx = (frame.right - self.right).min(0.0).max(frame.left - self.left);
        let dy = (frame.top - self.top).min(0.0).max(frame.bottom - self.bottom);
        Self { left: self.left + dx, right: self.right + dx, bottom: self.bottom + dy, top: self.top + dy }
    }

    fn holds(&self, inner: &Area) -> bool {
        self.left <= inner.left
            && inner.right <= self.right
            && self.bottom <= inner.bottom
            && inner.top <= self.top
    }
}

/// A curve that wants its name beside it.
#[derive(Clone, Copy, Debug)]
pub struct Curve<'a> {
    /// Heights at the common x; NaN where there is no answer.
    pub y: &'a [f64],
    /// Width and height of the name.
    pub size: (f64, f64),
    /// The name may be left out when there is no clean place for it.
    pub optional: bool,
}

/// Where a name goes.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Label {
    /// The room of the name.
    pub area: Area,
    /// The point of the curve that it names.
    pub anchor: (f64, f64),
    /// It stands so far off that a thin line should lead to the anchor.
    pub leader: bool,
}

impl Label {
    /// Where a leader meets the name: the point of its upper or lower edge nearest to the anchor.
    pub fn leader_end(&self) -> (f64, f64) {
        let Area { left, right, bottom, top } = self.area;
        let y = if self.anchor.1 < bottom { bottom } else { top };
        (self.anchor.0.max(left).min(right), y)
    }

    /// What the name and its leader cover.
    fn covers(&self) -> impl Iterator<Item = Area> {
        let (x, y) = self.leader_end();
        let slack = (self.area.right - self.area.left) * 0.04;
        let line = Area {
            left: x.min(self.anchor.0) - slack,
            right: x.max(self.anchor.0) + slack,
            bottom: y.min(self.anchor.1),
            top: y.max(self.anchor.1),
        };
        std::iter::once(self.area).chain(self.leader.then_some(line))
    }
}

/// Points of a curve at which a name is tried.
const TRIES: usize = 48;
/// Free space between a curve and its name, in heights of the name.
const GAP: f64 = 0.12;
/// A name is hung on points that reach this share of the height of the curve.
const PROMINENT: f64 = 0.3;
/// Distances above and below the curve that are tried, in heights of the name.
const STEPS: [f64; 4] = [0.0, 0.6, 1.4, 2.4];

/// Places the names one by one, in the order given: put the curves that matter most first. `x` ascends and is common
/// to all curves; names stay inside `frame` and off the `taken` areas. `None` for a curve without any point in the
/// frame, and for an optional one without a clean place.
pub fn place(x: &[f64], curves: &[Curve], frame: Area, taken: &[Area]) -> Vec<Option<Label>> {
    let mut placed: Vec<Area> = Vec::with_capacity(curves.len());
    curves
        .iter()
        .enumerate()
        .map(|(own, curve)| {
            let best = candidates(x, curve, frame)
                .map(|label| {
                    let others = || placed.iter().chain(taken);
                    let hits =
                        label.covers().map(|own| others().filter(|o| own.overlaps(o)).count()).sum::<usize>();
                    (hits, cost(x, curves, own, &label, frame), label)
                })
                .min_by(|a, b| a.0.cmp(&b.0).then(a.1.total_cmp(&b.1)));
            let (hits, _, label) = best?;
            if curve.optional && (hits > 0 || crossings(x, curves, own, &label.area) > 0) {
                return None;
            }
            placed.extend(label.covers());
            Some(label)
        })
        .collect()
}

/// Of several rooms for words that belong to no curve, the one with the fewest taken areas and curves in it; the first
/// of equals.
pub fn quietest(
    x: &[f64],
    curves: &[&[f64]],
    rooms: impl IntoIterator<Item = Area>,
    taken: &[Area],
) -> Option<Area> {
    rooms.into_iter().min_by_key(|area| {
        let hits = taken.iter().filter(|other| area.overlaps(other)).count();
        (hits, curves.iter().filter(|y| runs_through(x, y, area)).count())
    })
}

/// Places to try for one name: over, under, left and right of points all along the curve.
fn candidates<'a>(x: &'a [f64], curve: &'a Curve, frame: Area) -> impl Iterator<Item = Label> + 'a {
    let (width, height) = curve.size;
    let gap = GAP * height;
    let stride = x.len().div_ceil(TRIES).max(1);
    let peak = peak(x, curve.y, frame);
    let points = (0..x.len()).step_by(stride).chain(peak);
    let least = peak.map_or(frame.bottom, |i| frame.bottom + PROMINENT * (curve.y[i] - frame.bottom));
    points.filter(move |&i| curve.y[i] >= least && inside(x[i], curve.y[i], frame)).flat_map(move |i| {
        let anchor = (x[i], curve.y[i]);
        let low_x = (frame.left + width / 2.0).min(frame.right - width / 2.0);
        let centre = anchor.0.clamp(low_x, low_x.max(frame.right - width / 2.0));
        let (low, high) =
            extent(x, curve.y, centre - width / 2.0, centre + width / 2.0).unwrap_or((anchor.1, anchor.1));
        let beside = [width, -width].map(|side| {
            let room =
                Area::about(anchor.0 + side * 0.5 + side.signum() * width * 0.06, anchor.1, curve.size);
            Label { area: room, anchor, leader: false }
        });
        let over_and_under = STEPS.into_iter().flat_map(move |step| {
            let off = gap + height * (0.5 + step);
            [high + off, low - off].map(|y| {
                let area = Area::about(centre, y, curve.size);
                let away = (y - anchor.1).abs() - height / 2.0;
                Label { area, anchor, leader: away > height * 0.9 }
            })
        });
        over_and_under.chain(beside).filter(move |label| frame.holds(&label.area))
    })
}

/// What speaks against a place; the smallest wins.
fn cost(x: &[f64], curves: &[Curve], own: usize, label: &Label, frame: Area) -> f64 {
    let (width, height) = curves[own].size;
    let area = &label.area;
    let (middle_x, middle_y) = area.middle();
    let away = ((middle_y - label.anchor.1).abs() / height - 0.5).max(0.0)
        + ((middle_x - label.anchor.0).abs() / width - 0.5).max(0.0);
    let nearest = curves
        .iter()
        .enumerate()
        .filter(|(i, _)| *i != own)
        .filter_map(|(_, other)| distance(x, other.y, area, frame))
        .fold(f64::INFINITY, f64::min);
    let own_distance = distance(x, curves[own].y, area, frame).unwrap_or(0.0);
    let mixed_up = if nearest < own_distance + 0.2 * height { 4.0 } else { 0.0 };
    let crowded = (-nearest / height).exp();
    let top = peak(x, curves[own].y, frame).map_or(1.0, |i| curves[own].y[i] - frame.bottom);
    let low = if top > 0.0 { 1.0 - (label.anchor.1 - frame.bottom) / top } else { 0.0 };
    8.0 * crossings(x, curves, own, area) as f64 + 1.5 * away + mixed_up + 1.5 * crowded + 2.5 * low
}

/// How many curves run through an area; its own counts too.
fn crossings(x: &[f64], curves: &[Curve], own: usize, area: &Area) -> usize {
    let weight = |i: usize| if i == own { 2 } else { 1 };
    curves
        .iter()
        .enumerate()
        .filter(|(_, curve)| runs_through(x, curve.y, area))
        .map(|(i, _)| weight(i))
        .sum()
}

fn runs_through(x: &[f64], y: &[f64], area: &Area) -> bool {
    pieces(x, y, area.left, area.right).any(|(low, high)| low < area.top && area.bottom < high)
}

/// Smallest vertical distance between an area and the part of a curve over or under it.
fn distance(x: &[f64], y: &[f64], area: &Area, frame: Area) -> Option<f64> {
    pieces(x, y, area.left, area.right)
        .filter(|(low, high)| *low <= frame.top && *high >= frame.bottom)
        .map(|(low, high)| (low - area.top).max(area.bottom - high).max(0.0))
        .min_by(f64::total_cmp)
}

/// Smallest and largest height of a curve between two x.
pub fn extent(x: &[f64], y: &[f64], left: f64, right: f64) -> Option<(f64, f64)> {
    pieces(x, y, left, right).reduce(|a, b| (a.0.min(b.0), a.1.max(b.1)))
}

/// Lowest and highest point of each straight piece of a curve, cut to the part between two x.
fn pieces<'a>(x: &'a [f64], y: &'a [f64], left: f64, right: f64) -> impl Iterator<Item = (f64, f64)> + 'a {
    let first = x.partition_point(|&v| v < left).saturating_sub(1);
    let last = (x.partition_point(|&v| v <= right) + 1).min(x.len());
    (first..last.saturating_sub(1)).filter_map(move |i| {
        let (a, b) = ((x[i], y[i]), (x[i + 1], y[i + 1]));
        if !(a.1.is_finite() && b.1.is_finite()) || b.0 <= left || a.0 >= right {
            return None;
        }
        let at = |v: f64| if b.0 > a.0 { a.1 + (b.1 - a.1) * (v - a.0) / (b.0 - a.0) } else { a.1 };
        let (from, to) = (at(left.max(a.0)), at(right.min(b.0)));
        Some((from.min(to), from.max(to)))
    })
}

fn inside(x: f64, y: f64, frame: Area) -> bool {
    (frame.left..=frame.right).contains(&x) && (frame.bottom..=frame.top).contains(&y)
}

fn peak(x: &[f64], y: &[f64], frame: Area) -> Option<usize> {
    (0..x.len()).filter(|&i| inside(x[i], y[i], frame)).max_by(|a, b| y[*a].total_cmp(&y[*b]))
}

#[cfg(test)]
mod tests;
