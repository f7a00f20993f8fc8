//! Dispersal that heeds crowding: more leave where there is little room, and those who settle pass full patches by.

use crate::network::CrowdingResponse;
use crate::num::pow;

/// How crowded the patches are in this year's dispersal: their numbers after the local dynamics, before anyone leaves.
///
/// A list is empty where nothing depends on it.
#[derive(Debug, Default)]
pub(super) struct Crowd {
    /// by patch: what multiplies every chance to leave
    eagerness: Vec<f64>,
    /// by patch: whether it holds its capacity or more
    full: Vec<bool>,
}

/// What the chances of a row's targets come to, where some but not all of them are full.
#[derive(Debug, Clone, Copy)]
pub(super) struct Room {
    /// chance to arrive in any target
    pub(super) anywhere: f64,
    /// chance to arrive in one with room
    pub(super) with_room: f64,
}

impl Crowd {
    /// Room for as many patches as there are, or for none where crowding does not matter.
    pub(super) fn new(response: CrowdingResponse, n_patches: usize) -> Self {
        let heeded = |matters: bool| if matters { n_patches } else { 0 };
        Self {
            eagerness: vec![1.0; heeded(response.emigration_exponent.is_some())],
            full: vec![false; heeded(response.avoids_full)],
        }
    }

    /// Takes down how crowded a patch is: `numbers` weighted toward capacity over its capacity of this year.
    pub(super) fn see(&mut self, response: CrowdingResponse, patch: usize, numbers: f64, capacity: f64) {
        if let Some(exponent) = response.emigration_exponent {
            self.eagerness[patch] = eagerness(numbers, capacity, exponent);
        }
        if response.avoids_full {
            self.full[patch] = numbers >= capacity;
        }
    }

    /// What multiplies every chance to leave a patch; the product may exceed 1, which then stands for 1.
    #[inline]
    pub(super) fn eagerness(&self, patch: usize) -> f64 {
        self.eagerness.get(patch).copied().unwrap_or(1.0)
    }

    #[inline]
    pub(super) fn is_full(&self, patch: u32) -> bool {
        self.full[patch as usize]
    }

    /// What is left of a row whose targets are passed by if full. `None` where that changes nothing: none is full, or all.
    #[inline]
    pub(super) fn room(&self, targets: &[u32], probabilities: &[f64]) -> Option<Room> {
        if self.full.is_empty() {
            return None;
        }
        let (mut anywhere, mut with_room, mut any_full) = (0.0, 0.0, false);
        for (target, probability) in targets.iter().zip(probabilities) {
            anywhere += probability;
            if self.is_full(*target) {
                any_full = true;
            } else {
                with_room += probability;
            }
        }
        (any_full && with_room > 0.0).then_some(Room { anywhere, with_room })
    }
}

/// (N/K)^exponent; without capacity, more than any chance to leave can bear, so that all leave.
fn eagerness(numbers: f64, capacity: f64, exponent: f64) -> f64 {
    if capacity <= 0.0 { f64::INFINITY } else { pow(numbers / capacity, exponent) }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn eagerness_is_a_power_of_crowding() {
        assert!((eagerness(30.0, 20.0, 1.0) - 1.5).abs() < 1e-15);
        assert!((eagerness(5.0, 20.0, 2.0) - 0.0625).abs() < 1e-15);
        assert!(eagerness(0.0, 20.0, 0.5).abs() < 1e-300);
        assert!(eagerness(0.0, 0.0, 1.0) > f64::MAX);
    }

    #[test]
    fn full_targets_leave_their_chance_to_the_others() {
        let response = CrowdingResponse { emigration_exponent: None, avoids_full: true };
        let mut crowd = Crowd::new(response, 3);
        let mut room = |numbers: [f64; 3]| {
            for (patch, here) in numbers.into_iter().enumerate() {
                crowd.see(response, patch, here, 10.0);
            }
            crowd.room(&[1, 2], &[0.5, 0.25]).map(|room| [room.anywhere, room.with_room])
        };
        assert_eq!(room([20.0, 9.0, 10.0]), Some([0.75, 0.5]), "at capacity is full");
        assert_eq!(room([20.0, 9.0, 9.5]), None, "nobody full");
        assert_eq!(room([0.0, 11.0, 10.0]), None, "all full");
        assert!(Crowd::new(CrowdingResponse::default(), 3).room(&[1, 2], &[0.5, 0.25]).is_none());
    }
}
