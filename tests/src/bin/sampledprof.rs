//! Temporary.
use stayband_core::exact::complex_roots::roots;
use stayband_core::exact::half_plane::count;
use stayband_core::locus::encounters;
use stayband_core::model::build;
use stayband_core::project::Project;
use stayband_core::ranges::{Family, Partition};
use stayband_core::sampled::period::{by_period, longest_period};
use stayband_core::sampled::{SampledAt, SampledLoop, locus, ranges};
use std::io::stdin;
use std::rc::Rc;
use std::time::Instant;

fn time<T>(name: &str, mut f: impl FnMut() -> T) -> T {
    let mut best = f64::INFINITY;
    let mut last = None;
    for _ in 0..7 {
        let start = Instant::now();
        last = Some(f());
        best = best.min(start.elapsed().as_secs_f64());
    }
    eprintln!("{name:24} {:.3} ms", 1e3 * best);
    last.unwrap()
}

fn main() {
    for line in stdin().lines() {
        let project: Project = serde_json::from_str(&line.unwrap()).unwrap();
        let model = build(&project).unwrap();
        let input = SampledLoop::new(&model, model.sampling.as_ref().unwrap()).unwrap();
        let family = time("family 192", || input.family(192).unwrap());
        time("family 96", || input.family(96).unwrap());
        time("on the axis", || family.on_the_axis());
        for (a, b) in [(1u32, 4u32), (1, 2), (2, 1), (4, 1), (16, 1), (64, 1), (300, 1)] {
            let other = input.at_period(&input.period * dashu_ratio::RBig::from_parts(a.into(), b.into()));
            time("   family at period", || other.family(192).unwrap());
            let bits = time("   ranges at period", || ranges(&other).map(|f| (f.bits, f.partition.places.len())));
            eprintln!("      {a}/{b} {bits:?}");
        }
        let found = time("ranges", || ranges(&input).unwrap());
        eprintln!(
            "order {} edges {} bits {:?} axis bits {:?}",
            family.order(),
            found.partition.places.len(),
            found.in_z.iter().map(|p| p.bits()).collect::<Vec<_>>(),
            found.on_the_axis.iter().map(|p| p.center.bits()).collect::<Vec<_>>()
        );
        let q = model.setting.clone().unwrap();
        time("count_at", || found.count_at(&q).unwrap());
        let at = stayband_core::sampled::family::at(&found.on_the_axis, &q);
        time("count center", || count(&at.center).unwrap());
        let fam = Family::new(found.in_z.clone()).unwrap();
        time("family new", || Family::new(found.in_z.clone()).unwrap());
        let part = time("partition z old", || Partition::new(&fam).unwrap());
        eprintln!("places {}", part.places.len());
        time("encounters", || encounters(&fam, &part).unwrap());
        time("roots d", || roots(&fam.parts[0]).unwrap());
        time("roots n", || roots(&fam.parts[1]).unwrap());
        time("locus", || locus(&found).unwrap());
        let at = SampledAt::new(&Rc::new(found.clone()), q.clone()).unwrap();
        time("poles", || SampledAt::new(&Rc::new(found.clone()), q.clone()).unwrap());
        time("answers", || SampledAt::new(&Rc::new(found.clone()), q.clone()).unwrap().answers().is_some());
        let f = at.frequency().unwrap();
        time("crossings", || {
            let at = SampledAt::new(&Rc::new(found.clone()), q.clone()).unwrap();
            let f = at.frequency().unwrap();
            (f.gain_crossings().unwrap().len(), f.phase_crossings().unwrap().len())
        });
        time("bandwidth", || {
            let at = SampledAt::new(&Rc::new(found.clone()), q.clone()).unwrap();
            at.frequency().unwrap().bandwidth().unwrap()
        });
        time("peak", || {
            let at = SampledAt::new(&Rc::new(found.clone()), q.clone()).unwrap();
            at.frequency().unwrap().peak()
        });
        time("response", || f.response().unwrap());
        time("longest", || longest_period(&input, &q));
        time("by period", || by_period(&found));
    }
}
