use super::Task;
use biasloom::spec::Effort;
use std::time::Instant;

#[test]
#[ignore]
fn probe() {
    let effort = match std::env::var("EFFORT").as_deref() {
        Ok("normal") => Effort::Normal,
        Ok("thorough") => Effort::Thorough,
        _ => Effort::Quick,
    };
    for name in std::env::var("SPECS").unwrap().split(',') {
        let task = Task::shipped(name, effort);
        let start = Instant::now();
        let o = task.explore();
        println!(
            "{name}: {:?} {:?} {} networks",
            start.elapsed(),
            o.status,
            o.front.len()
        );
        for n in o.front.iter().chain(o.nearest.iter().map(|b| &**b)) {
            for f in &n.figures {
                print!("{} {:.4e}; ", f.name, f.value);
            }
            println!(
                "fam {} {:?}",
                n.families.len(),
                n.families
                    .iter()
                    .map(|f| f.cell.as_str())
                    .collect::<Vec<_>>()
            );
            for b in n.broken.iter().take(4) {
                println!(
                    "   broken {} {:?} {:.3e} of {:.3e} {:?}",
                    b.figure, b.output, b.value, b.limit, b.corner
                );
            }
        }
        println!("{:?}", o.work);
    }
}

#[test]
#[ignore]
fn wide() {
    use biasloom::cells::solved::Solver;
    use biasloom::cells::{CELLS, Shape};
    use biasloom::network::{corners::climates, probes::Probes};
    use biasloom::spec::Rail;
    let task = Task::shipped("nanoamp", Effort::Quick);
    let job = task.job();
    let mut n = 0;
    for rail in [Rail::Sink, Rail::Source] {
        let probes = Probes::of(&job, rail);
        for current in [1e-7, 1e-6, 1e-5] {
            let mut solver =
                Solver::new(job.tech(rail), 3, current, &probes.volts, &climates(&job));
            for i in 0..9 {
                for j in 0..9 {
                    for drop in [0.0, 0.03, 0.08] {
                        for cic in [0.3, 3.0] {
                            for cl in [1.0, 2.5] {
                                let shape = Shape {
                                    cell: 3,
                                    length: 0.18e-6 * (20.0f64 / 0.18).powf(i as f64 / 8.0),
                                    inversion: 0.03 * (2000f64).powf(j as f64 / 8.0),
                                    cascode_length: 0.18e-6 * cl,
                                    cascode_inversion: cic,
                                    drop,
                                };
                                if let Err(e) = solver.solve(&shape) {
                                    n += 1;
                                    let u =
                                        CELLS[3].unit(&job.tech(rail), &shape, current).unwrap();
                                    if n % 20 == 0 {
                                        println!(
                                            "{rail:?} {current:e} {e:?} L {:.3e} ic {:.3} cl {:.3e} cic {cic} drop {drop} {:?}",
                                            shape.length, shape.inversion, shape.cascode_length, u
                                        );
                                    }
                                }
                            }
                        }
                    }
                }
            }
            println!("{rail:?} {current:e}: {n}");
        }
    }
}
