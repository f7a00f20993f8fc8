//! Capacity that changes from year to year.

/// The capacity of a patch by the years for which it is stated, in order; at least one.
pub(super) type Course = Vec<(u32, f64)>;

/// How the capacities of a landscape change over the years. The capacity of year t holds in the step from census t to t + 1.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct CapacityOverTime {
    /// the share by which every capacity changes a year, compounding: above -1, 0 for none
    pub trend_per_year: f64,
    /// standard deviation of a patch's capacity over years as a share of its mean; 0 for none
    pub variation: f64,
    /// by patch, in the order of the landscape; empty where no table states years
    courses: Vec<Course>,
}

impl CapacityOverTime {
    /// From what the study states; `courses` by patch in the order of the landscape, those of one year in all of them
    /// standing for no change.
    pub(super) fn new(trend_per_year: f64, variation: f64, courses: Vec<Course>) -> Self {
        let change = courses.iter().any(|course| course.len() > 1);
        Self { trend_per_year, variation, courses: if change { courses } else { Vec::new() } }
    }

    /// Whether every capacity is the same in every year.
    pub fn is_constant(&self) -> bool {
        self.trend_per_year == 0.0 && self.variation <= 0.0 && self.courses.is_empty()
    }

    /// Whether a table states capacities by years.
    pub fn has_table(&self) -> bool {
        !self.courses.is_empty()
    }

    /// The capacity of a patch in a year, before what varies by chance: `base`, that of census 0, where the table does not
    /// say otherwise, times (1 + trend)^year. Finite where `base` is.
    pub fn mean_in(&self, patch: usize, year: u32, base: f64) -> f64 {
        let stated = self.courses.get(patch).map_or(base, |course| at(course, year));
        if self.trend_per_year == 0.0 {
            return stated;
        }
        (stated * crate::num::pow(1.0 + self.trend_per_year, f64::from(year))).min(f64::MAX)
    }
}

/// Linear between the years stated, constant before the first and after the last.
pub(super) fn at(course: &[(u32, f64)], year: u32) -> f64 {
    let after = course.partition_point(|(stated, _)| *stated <= year);
    match (after.checked_sub(1).map(|before| course[before]), course.get(after)) {
        (Some((from, low)), Some((to, high))) => {
            let gone = f64::from(year - from) / f64::from(to - from);
            low + (high - low) * gone
        }
        (Some((_, last)), None) => last,
        (None, Some((_, first))) => *first,
        (None, None) => 0.0,
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Linear interpolation by hand.
    #[test]
    fn a_course_is_linear_between_its_years() {
        let course = [(10, 40.0), (20, 60.0), (21, 4.0)];
        let seen: Vec<f64> = [0, 10, 15, 20, 21, 99].iter().map(|year| at(&course, *year)).collect();
        assert_eq!(seen, [40.0, 40.0, 50.0, 60.0, 4.0, 4.0]);
    }

    #[test]
    fn a_trend_compounds() {
        let shrinking = CapacityOverTime::new(-0.5, 0.0, Vec::new());
        let seen: Vec<f64> = [0, 1, 2].iter().map(|year| shrinking.mean_in(0, *year, 80.0)).collect();
        assert_eq!(seen, [80.0, 40.0, 20.0]);
        let growing = CapacityOverTime::new(1.0, 0.0, Vec::new());
        assert!(growing.mean_in(0, 100_000, 80.0).is_finite());
        assert!(CapacityOverTime::new(0.0, 0.0, vec![vec![(0, 3.0)], vec![(0, 5.0)]]).is_constant());
    }
}
