//! Life histories that are lawful and odd: each is warned of where it is read.

use super::LifeHistory;
use crate::mistake::Mistake;
use crate::study::Table;

/// A stage that survives better than this belongs to a long-lived animal, whose numbers cannot grow by [`FAST_GROWTH`].
const LONG_LIVED: f64 = 0.8;
/// Growth a year that no long-lived animal reaches.
const FAST_GROWTH: f64 = 2.0;

/// Notes what is odd about a life history of stages or counts.
pub(super) fn warn(table: &Table<'_>, life_history: &LifeHistory) {
    let mut odd = Vec::new();
    if life_history.kind == "stages" {
        odd.extend(fast_growth(life_history));
        if (0..life_history.stages.len()).any(|stage| breeds(life_history, stage)) {
            odd.extend(unreached(life_history));
            odd.extend(without_end(life_history));
        } else {
            odd.push(("no stage has fecundity".to_owned(), "nobody breeds, so that numbers can only fall".to_owned()));
        }
    }
    if life_history.occupancy.is_none() && !life_history.varies() {
        let note = "every year is an average year, which makes persistence look better than it is";
        odd.push(("no vital rate varies from year to year".to_owned(), note.to_owned()));
    }
    for (found, note) in odd {
        table.document().warning(Mistake::new(table.place().clone(), found, note));
    }
}

type Oddity = (String, String);

fn fast_growth(life_history: &LifeHistory) -> Option<Oddity> {
    let growth = life_history.matrix.growth();
    let (position, survival) = (0..life_history.stages.len())
        .map(|stage| (stage, survival(life_history, stage)))
        .max_by(|a, b| a.1.total_cmp(&b.1))?;
    (growth > FAST_GROWTH && survival > LONG_LIVED).then(|| {
        let found = format!("growth of {growth:.3} in an average year");
        let note = format!(
            "{} survives {survival} a year, and so long-lived an animal does not double in a year: \
             fecundity counts young alive at the next census, of the individuals counted",
            life_history.stages[position].name
        );
        (found, note)
    })
}

/// Stages that nothing leads to.
fn unreached(life_history: &LifeHistory) -> Vec<Oddity> {
    let matrix = &life_history.matrix;
    let others = |stage: usize| (0..life_history.stages.len()).filter(move |from| *from != stage);
    let is_reached = |stage: usize| {
        others(stage).any(|from| matrix.fates[(stage, from)] > 0.0)
            || (0..life_history.stages.len()).any(|from| matrix.young[(stage, from)] > 0.0)
    };
    let note = "nothing leads to this stage: it holds those of the start alone";
    unlike(life_history, |stage| !is_reached(stage), note)
}

/// Stages of those who lead in which individuals stay for life without breeding.
fn without_end(life_history: &LifeHistory) -> Vec<Oddity> {
    let matrix = &life_history.matrix;
    let leads = |stage: usize| matrix.leading.as_ref().is_none_or(|leading| leading.contains(&stage));
    let stays = |stage: usize| {
        let leaves = (0..life_history.stages.len()).any(|to| to != stage && matrix.fates[(to, stage)] > 0.0);
        matrix.fates[(stage, stage)] > 0.0 && !leaves
    };
    let note = "this stage is never left and does not breed: those in it count as present, and can keep a patch occupied \
                that has no future";
    unlike(life_history, |stage| leads(stage) && stays(stage) && !breeds(life_history, stage), note)
}

fn unlike(life_history: &LifeHistory, is_odd: impl Fn(usize) -> bool, note: &str) -> Vec<Oddity> {
    let odd = (0..life_history.stages.len()).filter(|stage| is_odd(*stage));
    odd.map(|stage| (format!("life_history.{}", life_history.stages[stage].name), note.to_owned())).collect()
}

fn survival(life_history: &LifeHistory, stage: usize) -> f64 {
    (0..life_history.stages.len()).map(|to| life_history.matrix.fates[(to, stage)]).sum()
}

fn breeds(life_history: &LifeHistory, stage: usize) -> bool {
    (0..life_history.stages.len()).any(|to| life_history.matrix.young[(to, stage)] > 0.0)
}
