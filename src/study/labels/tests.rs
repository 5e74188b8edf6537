//! Tests of the placing of names.

use super::*;

const FRAME: Area = Area { left: 0.0, right: 14.0, bottom: 0.0, top: 100.0 };
const SIZE: (f64, f64) = (0.9, 6.0);

fn axis() -> Vec<f64> {
    (0..141).map(|i| i as f64 / 10.0).collect()
}

/// A flight of steps, like the ammines of a metal over pH.
fn bells(count: usize) -> Vec<Vec<f64>> {
    let bell = |k: usize, x: f64| 80.0 * (-(x - 14.0 * k as f64 / count as f64).powi(2)).exp();
    (0..count).map(|k| axis().into_iter().map(|x| bell(k, x)).collect()).collect()
}

fn named(lines: &[Vec<f64>], optional: bool) -> Vec<Option<Label>> {
    let curves: Vec<Curve> = lines.iter().map(|y| Curve { y, size: SIZE, optional }).collect();
    place(&axis(), &curves, FRAME, &[])
}

#[test]
fn twenty_names_stay_in_the_frame_and_do_not_overlap() {
    let placed: Vec<Area> = named(&bells(20), false).iter().map(|l| l.unwrap().area).collect();
    assert_eq!(placed.len(), 20);
    for (i, a) in placed.iter().enumerate() {
        assert!(FRAME.holds(a));
        assert!(placed[..i].iter().all(|b| !a.overlaps(b)), "{i}");
    }
}

#[test]
fn names_keep_off_curves_and_taken_areas_where_there_is_room() {
    let lines = bells(4);
    let curves: Vec<Curve> = lines.iter().map(|y| Curve { y, size: SIZE, optional: false }).collect();
    let taken = [Area { left: 3.0, right: 5.0, bottom: 0.0, top: 100.0 }];
    for (own, label) in place(&axis(), &curves, FRAME, &taken).iter().enumerate() {
        let area = label.unwrap().area;
        assert!(!area.overlaps(&taken[0]));
        assert_eq!(crossings(&axis(), &curves, own, &area), 0);
    }
}

#[test]
fn a_name_stands_next_to_its_own_curve() {
    for (label, line) in named(&bells(5), false).iter().zip(&bells(5)) {
        let Label { area, anchor, leader } = label.unwrap();
        assert!(line.contains(&anchor.1) && !leader);
        assert!((area.middle().1 - anchor.1).abs() < 2.0 * SIZE.1);
    }
}

#[test]
fn a_curve_without_points_has_no_name() {
    assert_eq!(named(&[vec![f64::NAN; 141], vec![300.0; 141]], false), [None, None]);
    assert!(place(&[], &[], FRAME, &[]).is_empty());
}

#[test]
fn an_optional_name_gives_way() {
    let crowd: Vec<Vec<f64>> = (0..60).map(|k| vec![k as f64 * 1.6; 141]).collect();
    assert!(named(&crowd, true).iter().any(Option::is_none));
    assert!(named(&crowd, false).iter().all(Option::is_some));
}

#[test]
fn curves_with_gaps_are_named_where_they_exist() {
    let mut line = vec![f64::NAN; 141];
    line[60..90].fill(40.0);
    let label = named(&[line], false)[0].unwrap();
    assert!((6.0..9.0).contains(&label.anchor.0));
}
