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

#[test]
#[ignore]
fn forms() {
    use biasloom::cells::solved::{Climate, Solver};
    use biasloom::cells::{CELLS, Shape, Tech};
    use biasloom::process::{Card, SHIPPED};
    use biasloom::spec::Rail;
    for (name, _) in SHIPPED {
        let card = Card::load(name).unwrap();
        for (cell, kind) in CELLS.iter().enumerate() {
            let mut din = [(0.0f64, 0.0f64); 3]; // by inversion
            let mut fall = [(0.0f64, 1.0f64); 3];
            let mut half = [(0.0f64, 1.0f64); 3];
            let (mut none, mut bad) = (0, 0);
            for rail in [Rail::Sink, Rail::Source] {
                let tech = Tech { card: &card, rail };
                let m = tech.mosfet();
                for l in [
                    m.length.least.0,
                    (m.length.least.0 * m.length.most.0).sqrt(),
                    m.length.most.0,
                ] {
                    for (i, ic) in [0.1, 1.0, 10.0].into_iter().enumerate() {
                        for cl in [m.length.least.0, 3.0 * m.length.least.0] {
                            for cic in [0.3, 3.0] {
                                for drop in [0.03, 0.1] {
                                    let shape = Shape {
                                        cell,
                                        length: l,
                                        inversion: ic,
                                        cascode_length: cl,
                                        cascode_inversion: cic,
                                        drop,
                                    };
                                    let v = kind.least_output(&tech, &shape);
                                    let climates: Vec<Climate> = vec![Climate {
                                        corner: 0,
                                        temperature: tech.nominal(),
                                    }];
                                    let mut s = Solver::new(
                                        tech,
                                        cell,
                                        1e-5,
                                        &[0.5 * v, v, v + 0.3],
                                        &climates,
                                    );
                                    match s.solve(&shape) {
                                        Ok(o) => {
                                            let d = o.input_lanes[0].0[0]
                                                - kind.input_voltage(&tech, &shape);
                                            din[i] = (din[i].0.min(d), din[i].1.max(d));
                                            let f = |k: usize| {
                                                1.0 - (1.0 + o.probes[k].error[0])
                                                    / (1.0 + o.probes[2].error[0])
                                            };
                                            fall[i] = (fall[i].0.max(f(1)), fall[i].1.min(f(1)));
                                            half[i] = (half[i].0.max(f(0)), half[i].1.min(f(0)));
                                        }
                                        Err(biasloom::cells::solved::Failure::NoSize) => none += 1,
                                        Err(_) => bad += 1,
                                    }
                                }
                            }
                        }
                    }
                }
            }
            println!(
                "{name:15} {:11} none {none} bad {bad} din {:?} fall {:?} half {:?}",
                kind.name(),
                din.map(|d| (format!("{:.0}mV", d.0 * 1e3), format!("{:.0}mV", d.1 * 1e3))),
                fall.map(|d| format!("{:.4}..{:.4}", d.1, d.0)),
                half.map(|d| format!("{:.3}..{:.3}", d.1, d.0))
            );
        }
    }
}
