//! Where in the operating window a dose is worst: pH, temperature, metal load, hardness, volume.
//!
//! Free metal against pH has interior extremes, so the window is scanned and searched inside, not only at its corners.
//! Drifts are first tried one at a time, which tells each wall its own worst side; the whole of pH and temperature is
//! then scanned with the drifts there, and the worst place found is moved along every coordinate until nothing gains.

use super::extreme::highest;
use crate::bath::{Bath, Corrected, Corrector, Points, Position, Range, Solids, Wall};
use crate::equilibrium::{Constants, Equilibrium, EquilibriumError, Gradient, LN_10, Value};

/// pH values scanned over the range before an extreme is refined.
const PH_SAMPLES: usize = 7;
/// Rounds along all coordinates.
const ROUNDS: usize = 4;
/// Gain (log10) that is worth another round.
const GAIN: f64 = 1e-9;
/// Halvings that enclose the pH at which a solid comes: a seventh of the range to within a meter's last digit.
const EDGE_STEPS: usize = 10;
/// What lies this far (log10) under its wall is not refined, and not asked for its uncertainty: no constant is known that
/// badly (95 % of a standard uncertainty of 1.5).
pub(super) const FAR: f64 = -2.5;

/// A point of the operating window.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Place {
    /// Temperature in °C.
    pub temperature_c: f64,
    /// pH to hold; `None` lets the charge balance decide.
    pub ph: Option<f64>,
    /// Where the drifts are.
    pub position: Position,
}

/// Something whose worst place is looked for.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) enum Objective {
    /// log10 of the excess over a wall.
    Wall(Wall),
    /// Most free metal of limit number n, log10 mol/L.
    Most(usize),
    /// Least free metal of limit number n, negative log10 mol/L.
    Least(usize),
}

/// A scan of the window, with the worst place of each objective.
#[derive(Clone, Debug, Default)]
pub(super) struct Survey {
    pub places: Vec<Place>,
    /// Scores of all objectives at each place, one place after another.
    pub scores: Vec<f64>,
    /// Worst place of each objective with its score.
    pub worst: Vec<(Place, f64)>,
    /// Numbers of the places where a solid is about to come or has just gone.
    pub edges: Vec<usize>,
}

impl Survey {
    /// Places and scores of one objective.
    pub fn of(&self, objective: usize) -> impl Iterator<Item = (Place, f64)> + '_ {
        (0..self.places.len()).map(move |i| (self.places[i], self.score(i, objective)))
    }

    /// Places and scores of one objective where a solid comes or goes.
    pub fn edges_of(&self, objective: usize) -> impl Iterator<Item = (Place, f64)> + '_ {
        self.edges.iter().map(move |&i| (self.places[i], self.score(i, objective)))
    }

    fn score(&self, place: usize, objective: usize) -> f64 {
        self.scores[place * self.worst.len() + objective]
    }
}

/// Solves one bath at many places for the doses at hand.
pub(super) struct Places<'a> {
    bath: &'a Bath,
    /// Constants at the temperatures of the scan, and one more that is replaced as needed.
    levels: Vec<(f64, Constants)>,
    scanned_levels: usize,
    ph: Vec<Option<f64>>,
    set: Place,
    points: Points<'a>,
    /// A solver of its own for each place that is asked again and again, so that it starts from its last dose.
    seats: Vec<(Place, Points<'a>)>,
    corrector: Corrector<'a>,
    totals: Vec<f64>,
    solution: Equilibrium,
}

impl<'a> Places<'a> {
    /// Prepares a window with a given range of pH.
    ///
    /// # Errors
    /// [`EquilibriumError`] for an ill-posed bath.
    pub fn new(bath: &'a Bath, ph: Option<Range>) -> Result<Self, EquilibriumError> {
        let range = bath.project.tank.temperature_c;
        let mut temperatures = vec![range.low, range.set, range.high];
        temperatures.dedup();
        let set =
            Place { temperature_c: range.set, ph: ph.map(|range| range.set), position: Position::default() };
        Ok(Self {
            scanned_levels: temperatures.len(),
            levels: temperatures.into_iter().map(|t| (t, bath.constants_at(t))).collect(),
            ph: ph.map_or_else(
                || vec![None],
                |range| range.samples(PH_SAMPLES).into_iter().map(Some).collect(),
            ),
            set,
            points: Points::new(bath, Solids::Walls),
            seats: Vec::new(),
            corrector: Corrector::new(bath)?,
            totals: Vec::new(),
            solution: Equilibrium::default(),
            bath,
        })
    }

    /// The set point.
    pub fn set(&self) -> Place {
        self.set
    }

    /// The bath with doses in g/L and its pH brought back.
    ///
    /// # Errors
    /// [`EquilibriumError`] for an ill-posed bath.
    pub fn dose(&mut self, doses: &[f64]) -> Result<Corrected, EquilibriumError> {
        let (totals, dilution) = self.corrector.balanced(doses)?;
        Ok(Corrected { totals, dilution, adjustment: None, failure: None })
    }

    /// Gives a place a solver of its own.
    pub fn seat(&mut self, place: Place) {
        if self.seats.iter().all(|(known, _)| *known != place) {
            self.seats.push((place, Points::new(self.bath, Solids::Walls)));
        }
    }

    /// The bath at a place; solids that must not form stay dissolved.
    ///
    /// # Errors
    /// [`EquilibriumError`] for an ill-posed bath.
    pub fn solve(&mut self, dosed: &Corrected, place: &Place) -> Result<&Equilibrium, EquilibriumError> {
        let level = self.level(place.temperature_c);
        self.totals.clone_from(&dosed.totals);
        self.bath.drifted(&place.position, dosed.dilution, &mut self.totals);
        let seat = self.seats.iter_mut().find(|(known, _)| known == place).map(|(_, points)| points);
        let points = seat.unwrap_or(&mut self.points);
        points.solve_into(&self.levels[level].1, &self.totals, place.ph, &mut self.solution)?;
        Ok(&self.solution)
    }

    /// Standard uncertainties of log10 of values at a place.
    ///
    /// # Errors
    /// [`EquilibriumError`] for an ill-posed bath.
    pub fn sigmas(
        &mut self,
        dosed: &Corrected,
        place: &Place,
        values: &[Value],
    ) -> Result<Vec<f64>, EquilibriumError> {
        let gradients = self.gradients(dosed, place, values)?;
        Ok(gradients.iter().map(|gradient| gradient.sigma_log10(&self.bath.system)).collect())
    }

    /// Gradients of values at a place.
    ///
    /// # Errors
    /// [`EquilibriumError`] for an ill-posed bath.
    pub fn gradients(
        &mut self,
        dosed: &Corrected,
        place: &Place,
        values: &[Value],
    ) -> Result<Vec<Gradient>, EquilibriumError> {
        self.solve(dosed, place)?;
        let level = self.level(place.temperature_c);
        let Self { points, levels, totals, solution, .. } = self;
        points.sensitivities(&levels[level].1, totals, place.ph, solution, |answers| {
            values.iter().map(|value| answers.gradient(*value)).collect()
        })
    }

    /// Totals at a place, mol/L.
    pub fn totals(&self, dosed: &Corrected, place: &Place) -> Vec<f64> {
        let mut totals = dosed.totals.clone();
        self.bath.drifted(&place.position, dosed.dilution, &mut totals);
        totals
    }

    /// Scores at a place, appended to `scores`.
    ///
    /// # Errors
    /// [`EquilibriumError`] for an ill-posed bath.
    pub fn score(
        &mut self,
        dosed: &Corrected,
        place: &Place,
        objectives: &[Objective],
        scores: &mut Vec<f64>,
    ) -> Result<(), EquilibriumError> {
        let bath = self.bath;
        let solution = self.solve(dosed, place)?;
        scores.extend(objectives.iter().map(|objective| score(bath, *objective, solution, place)));
        Ok(())
    }

    /// Scans the window and finds the worst place of each objective.
    ///
    /// # Errors
    /// [`EquilibriumError`] for an ill-posed bath.
    pub fn survey(
        &mut self,
        dosed: &Corrected,
        objectives: &[Objective],
    ) -> Result<Survey, EquilibriumError> {
        let mut survey = Survey::default();
        let sides = self.worst_sides(dosed, objectives)?;
        for position in sides {
            for level in 0..self.scanned_levels {
                let mut last: Option<(Place, Vec<bool>)> = None;
                for at in 0..self.ph.len() {
                    let place = Place { temperature_c: self.levels[level].0, ph: self.ph[at], position };
                    self.score(dosed, &place, objectives, &mut survey.scores)?;
                    survey.places.push(place);
                    let present = self.present();
                    if let Some((before, solids)) = last.filter(|(_, solids)| *solids != present) {
                        for edge in self.edge(dosed, (before, &solids), place)?.into_iter().flatten() {
                            survey.edges.push(survey.places.len());
                            self.score(dosed, &edge, objectives, &mut survey.scores)?;
                            survey.places.push(edge);
                        }
                    }
                    last = Some((place, present));
                }
            }
        }
        let stride = objectives.len();
        for (number, objective) in objectives.iter().enumerate() {
            let scores = survey.scores.iter().skip(number).step_by(stride).enumerate();
            let best = scores.max_by(|a, b| a.1.total_cmp(b.1)).map(|(i, score)| (survey.places[i], *score));
            let Some(best) = best else { continue };
            let refined = match objective {
                Objective::Wall(_) if best.1 < FAR => best,
                _ => self.refined(dosed, *objective, best)?,
            };
            survey.worst.push(refined);
        }
        Ok(survey)
    }

    /// Which solids the last solution holds.
    fn present(&self) -> Vec<bool> {
        self.solution.solids.iter().map(|amount| *amount > 0.0).collect()
    }

    /// Both sides of the pH between two places at which the first solid comes or goes: uncertainty jumps there, and free
    /// metal has its kinks there.
    fn edge(
        &mut self,
        dosed: &Corrected,
        (before, solids): (Place, &[bool]),
        after: Place,
    ) -> Result<Option<[Place; 2]>, EquilibriumError> {
        let (Some(mut low), Some(mut high)) = (before.ph, after.ph) else { return Ok(None) };
        for _ in 0..EDGE_STEPS {
            let middle = 0.5 * (low + high);
            self.solve(dosed, &Place { ph: Some(middle), ..before })?;
            *(if self.present() == solids { &mut low } else { &mut high }) = middle;
        }
        Ok(Some([low, high].map(|ph| Place { ph: Some(ph), ..before })))
    }

    /// Where solids come and go along the pH range at the temperature and the drifts of a place.
    ///
    /// # Errors
    /// [`EquilibriumError`] for an ill-posed bath.
    pub fn edges_along(&mut self, dosed: &Corrected, line: &Place) -> Result<Vec<Place>, EquilibriumError> {
        let mut edges = Vec::new();
        let mut last: Option<(Place, Vec<bool>)> = None;
        for at in 0..self.ph.len() {
            let place = Place { ph: self.ph[at], ..*line };
            self.solve(dosed, &place)?;
            let present = self.present();
            if let Some((before, solids)) = last.filter(|(_, solids)| *solids != present) {
                edges.extend(self.edge(dosed, (before, &solids), place)?.into_iter().flatten());
            }
            last = Some((place, present));
        }
        Ok(edges)
    }

    /// The set point of the drifts, and the sides that each objective fears, each once.
    fn worst_sides(
        &mut self,
        dosed: &Corrected,
        objectives: &[Objective],
    ) -> Result<Vec<Position>, EquilibriumError> {
        let mut sides = vec![Position::default()];
        if self.bath.drifts.is_empty() || objectives.is_empty() {
            return Ok(sides);
        }
        let mut scores = Vec::new();
        self.score(dosed, &self.set(), objectives, &mut scores)?;
        let mut feared = vec![(Position::default(), 0.0); objectives.len()];
        for axis in 0..self.bath.drifts.len() {
            let mut best = scores.clone();
            for t in [-1.0, 1.0] {
                let mut place = self.set();
                place.position.0[axis] = t;
                let mut moved = Vec::with_capacity(objectives.len());
                self.score(dosed, &place, objectives, &mut moved)?;
                for ((best, moved), (position, _)) in best.iter_mut().zip(moved).zip(&mut feared) {
                    if moved > *best {
                        (*best, position.0[axis]) = (moved, t);
                    }
                }
            }
        }
        for (position, _) in feared {
            if !sides.contains(&position) {
                sides.push(position);
            }
        }
        Ok(sides)
    }

    /// Moves a place along every coordinate until nothing gains.
    fn refined(
        &mut self,
        dosed: &Corrected,
        objective: Objective,
        (mut place, mut highest_score): (Place, f64),
    ) -> Result<(Place, f64), EquilibriumError> {
        for _ in 0..ROUNDS {
            let before = highest_score;
            for axis in 0..self.bath.drifts.len() {
                for t in [-1.0, 0.0, 1.0] {
                    let mut moved = place;
                    moved.position.0[axis] = t;
                    if moved != place {
                        self.keep_higher(dosed, objective, moved, (&mut place, &mut highest_score))?;
                    }
                }
                if place.position.0[axis] == 0.0 && self.is_wide(axis) {
                    self.climb((dosed, objective), (-1.0, 1.0), (&mut place, &mut highest_score), |p, t| {
                        p.position.0[axis] = t;
                    })?;
                }
            }
            if let Some((low, high)) = self.neighbours(place.ph) {
                self.climb((dosed, objective), (low, high), (&mut place, &mut highest_score), |p, ph| {
                    p.ph = Some(ph);
                })?;
            }
            let (coldest, hottest) = (self.levels[0].0, self.levels[self.scanned_levels - 1].0);
            if place.temperature_c > coldest && place.temperature_c < hottest {
                self.climb(
                    (dosed, objective),
                    (coldest, hottest),
                    (&mut place, &mut highest_score),
                    |p, t| {
                        p.temperature_c = t;
                    },
                )?;
            }
            // Without drifts the scan has already tried every other combination.
            if highest_score <= before + GAIN || self.bath.drifts.is_empty() {
                break;
            }
        }
        Ok((place, highest_score))
    }

    /// Whether the inside of a drift differs from both its ends.
    fn is_wide(&self, axis: usize) -> bool {
        let axis = &self.bath.drifts[axis];
        axis.low < axis.set && axis.set < axis.high
    }

    /// Golden-section search along one coordinate, kept where it gains.
    fn climb(
        &mut self,
        (dosed, objective): (&Corrected, Objective),
        (low, high): (f64, f64),
        (place, best): (&mut Place, &mut f64),
        put: impl Fn(&mut Place, f64),
    ) -> Result<(), EquilibriumError> {
        let start = *place;
        let bath = self.bath;
        let (x, found) = highest(low, high, |x| {
            let mut moved = start;
            put(&mut moved, x);
            self.solve(dosed, &moved).map(|solution| score(bath, objective, solution, &moved))
        })?;
        if found > *best {
            *best = found;
            put(place, x);
        }
        Ok(())
    }

    fn keep_higher(
        &mut self,
        dosed: &Corrected,
        objective: Objective,
        moved: Place,
        (place, best): (&mut Place, &mut f64),
    ) -> Result<(), EquilibriumError> {
        let bath = self.bath;
        let found = score(bath, objective, self.solve(dosed, &moved)?, &moved);
        if found > *best {
            (*place, *best) = (moved, found);
        }
        Ok(())
    }

    /// Scanned pH values on both sides, for a pH inside the range.
    fn neighbours(&self, ph: Option<f64>) -> Option<(f64, f64)> {
        let ph = ph?;
        let scanned = || self.ph.iter().flatten().copied();
        let low = scanned().rfind(|known| *known < ph)?;
        let high = scanned().find(|known| *known > ph)?;
        Some((low, high))
    }

    /// Index of the constants at a temperature.
    fn level(&mut self, temperature_c: f64) -> usize {
        if let Some(known) = self.levels.iter().position(|(t, _)| *t == temperature_c) {
            return known;
        }
        self.levels.truncate(self.scanned_levels);
        self.levels.push((temperature_c, self.bath.constants_at(temperature_c)));
        self.scanned_levels
    }
}

/// The score of an objective: higher is worse.
fn score(bath: &Bath, objective: Objective, solution: &Equilibrium, place: &Place) -> f64 {
    let log10_free = |limit: usize| solution.ln_c[bath.limits[limit].component] / LN_10;
    match objective {
        Objective::Wall(wall) => bath.excess(wall, solution, place.temperature_c),
        Objective::Most(limit) => log10_free(limit),
        Objective::Least(limit) => -log10_free(limit),
    }
}
