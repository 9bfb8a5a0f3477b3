//! The same edits replanned twice, one after the other: with the solver in the thread that asks, and in a worker process.

use std::fs;
use std::path::Path;
use std::sync::Arc;

use millreeve::keep::workers::{Limits, Workers};
use millreeve::keep::{Job, ModelPath, Planner, Report, Settings, What, replan};

use crate::rng::Rng;
use crate::works::Works;
use crate::{WARMING, median, replanned, scarce};

/// A folder with one model in it, and who plans it.
struct Place {
    _folder: tempfile::TempDir,
    job: Job,
    planner: Box<dyn Planner>,
}

impl Place {
    fn new(planner: Box<dyn Planner>) -> Self {
        let folder = tempfile::tempdir().unwrap();
        let root: Arc<Path> = Arc::from(folder.path());
        let path = ModelPath::new(&root, Path::new("tiles.model.toml")).unwrap();
        let job = Job { path, what: What::Replan, state: Arc::from(root.join(".millreeve")) };
        Self { _folder: folder, job, planner }
    }

    fn save(&mut self, text: &str) -> Box<Report> {
        fs::write(self.job.path.full(), text).unwrap();
        replanned(self.planner.as_mut(), &self.job)
    }
}

/// Prints a line of the table: medians, and medians of ratios of two times that were taken one after the other.
pub(crate) fn tell(activities: usize, resources: usize, edits: usize) {
    let settings = Settings::default();
    let program = Path::new(env!("CARGO_BIN_EXE_millreeve")).to_owned();
    let workers = Workers::of(program, Limits::for_live(1 << 30));
    let mut here = Place::new(replan::factory(&settings)());
    let mut apart = Place::new(replan::factory_apart(&settings, workers)());
    let mut rng = Rng::new(1);
    let mut works = Works::new(activities, resources, &mut rng);
    let text = works.text();
    here.save(&text);
    apart.save(&text);
    let mut times = Vec::new();
    for edit in 0..WARMING + edits {
        let scarce = scarce(&here.job.path, resources);
        works.edit(*rng.pick(&scarce), &mut rng);
        let text = works.text();
        let (one, other) = (here.save(&text), apart.save(&text));
        assert_eq!(one.aim, other.aim);
        let [plan, same] = [&here, &apart].map(|place| fs::read_to_string(place.job.path.plan()).unwrap());
        assert_eq!(plan, same);
        if edit >= WARMING {
            times.push((one.milliseconds, other.milliseconds));
        }
    }
    let over = |of: fn(&(_, _)) -> f64| median(times.iter().map(of).collect());
    println!(
        "{activities:10} | solve {:8.2} {:8.2} ms {:6.2} | whole {:8.2} {:8.2} ms {:6.2}",
        over(|(one, _)| one.solve),
        over(|(_, other)| other.solve),
        over(|(one, other)| other.solve / one.solve),
        over(|(one, _)| one.all),
        over(|(_, other)| other.all),
        over(|(one, other)| other.all / one.all),
    );
}
