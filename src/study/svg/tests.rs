//! Tests of the picture.

use super::shares::NAMED;
use super::*;
use crate::chemistry::pretty;
use crate::study::FreeLine;

/// Walks the tags: every one closed in order, attributes quoted, no loose markup in the text.
fn assert_well_formed(svg: &str) {
    let mut open: Vec<&str> = Vec::new();
    let mut rest = svg;
    while let Some(at) = rest.find('<') {
        assert_references(&rest[..at]);
        let end = rest.find('>').expect("a tag ends");
        let tag = &rest[at + 1..end];
        assert_eq!(tag.matches('"').count() % 2, 0, "{tag}");
        assert!(!tag.contains('<'), "{tag}");
        assert_references(tag);
        if let Some(name) = tag.strip_prefix('/') {
            assert_eq!(open.pop(), Some(name));
        } else if !tag.ends_with('/') {
            open.push(tag.split_whitespace().next().unwrap());
        }
        rest = &rest[end + 1..];
    }
    assert!(open.is_empty() && rest.trim().is_empty(), "{open:?} {rest}");
}

fn assert_references(text: &str) {
    assert!(!text.contains('>'), "{text}");
    for (at, _) in text.match_indices('&') {
        let known = ["&amp;", "&lt;", "&gt;", "&quot;", "&apos;"];
        assert!(known.iter().any(|entity| text[at..].starts_with(entity)), "{text}");
    }
}

#[test]
fn every_picture_is_well_formed_and_without_missing_numbers() {
    for (name, (bath, diagram)) in sample::all() {
        let svg = to_svg(&bath, &diagram);
        assert_well_formed(&svg);
        assert!(!svg.contains("NaN") && !svg.contains("inf"), "{name}");
        if let Some(folder) = std::env::var_os("BATHWRIGHT_PICTURES") {
            std::fs::write(std::path::Path::new(&folder).join(format!("{name}.svg")), svg).unwrap();
        }
    }
}

#[test]
fn names_that_users_type_are_escaped() {
    let (bath, mut diagram) = sample::over_ph();
    diagram.series[0].token = "Cu</text><script>&".to_owned();
    let svg = to_svg(&bath, &diagram);
    assert_well_formed(&svg);
    assert!(svg.contains("Copper strike &lt;A&gt; &amp; &quot;B&quot;"));
    assert!(svg.contains("from the coupon series &lt;b&gt;"));
    assert!(!svg.contains("<script") && !svg.contains("<b>"));
}

#[test]
fn every_series_that_reaches_five_per_cent_is_named() {
    for (name, (bath, diagram)) in sample::all() {
        let svg = to_svg(&bath, &diagram);
        for series in diagram.series.iter().filter(|series| series.peak >= NAMED) {
            let label = format!("text-anchor=\"middle\">{}</text>", paper::escape(&pretty(&series.token)));
            assert!(svg.contains(&label), "{} in {name}", series.token);
        }
    }
}

#[test]
fn the_demo_bath_says_that_its_numbers_are_invented() {
    let (mut bath, diagram) = sample::over_ph();
    assert!(to_svg(&bath, &diagram).contains(">demo bath, invented numbers<"));
    bath.project.invented = false;
    assert!(!to_svg(&bath, &diagram).contains("invented"));
}

#[test]
fn the_set_point_the_range_and_the_limits_are_in_words() {
    let (bath, diagram) = sample::over_ph();
    let svg = to_svg(&bath, &diagram);
    for words in [">set point pH 9.45<", "operating range 9.2 to 9.8", "ceiling pCu 10.8", "floor pCu 13.2"] {
        assert!(svg.contains(words), "{words}");
    }
    let (bath, diagram) = sample::over_dose();
    let svg = to_svg(&bath, &diagram);
    assert!(svg.contains(">dose now 16 g/L<") && svg.contains("g/L</text>"));
    assert!(!svg.contains("operating range"));
}

#[test]
fn plates_and_strips_follow_the_limits() {
    let plates = |(bath, diagram): &(Bath, Diagram)| {
        let svg = to_svg(bath, diagram);
        [palette::HATCH_CEILING, palette::HATCH_FLOOR].map(|hatch| svg.matches(hatch).count())
    };
    assert_eq!(plates(&sample::over_ph()), [1, 1]);
    let wide = Axis::Ph { from: 0.0, to: 14.0 };
    assert_eq!(plates(&sample::draw(&sample::nickel(), wide, "Ni+2")), [3, 1]);
    assert_eq!(plates(&sample::draw(&sample::bare(), wide, "Ni+2")), [0, 0]);
}

#[test]
fn a_solid_is_named_where_it_is_present() {
    let (bath, diagram) = sample::draw(&sample::bare(), Axis::Ph { from: 0.0, to: 14.0 }, "Ni+2");
    let svg = to_svg(&bath, &diagram);
    assert!(!diagram.solids.is_empty());
    for region in &diagram.solids {
        let name = bath.solid_name(region.solid);
        assert!(svg.contains(&paper::escape(name)), "{name}");
    }
}

#[test]
fn a_diagram_without_any_answer_is_still_a_picture() {
    let (bath, mut diagram) = sample::over_ph();
    diagram.series.iter_mut().for_each(|series| series.share.fill(f64::NAN));
    diagram.free.iter_mut().for_each(|FreeLine { log10_free, .. }| log10_free.fill(f64::NAN));
    assert_well_formed(&to_svg(&bath, &diagram));
    let empty =
        Diagram { x: Vec::new(), series: Vec::new(), free: Vec::new(), solids: Vec::new(), ..diagram };
    let svg = to_svg(&bath, &empty);
    assert_well_formed(&svg);
    assert!(!svg.contains("NaN"));
}

#[test]
fn the_picture_of_a_shift_is_well_formed_escapes_what_users_type_and_marks_what_is_added() {
    for (file, dose) in [("derusting.ron", 29.24), ("electroless_nickel.ron", 11.9)] {
        let mut project = crate::bath::Demo::named(file).unwrap().project().unwrap();
        project.agents[0].dose_g_l = dose;
        project.name = "Tank <A> & \"B\"".to_owned();
        project.limits[0].wall = "found <b>by</b> & by".to_owned();
        let bath = Bath::resolve(&project).unwrap();
        let running = bath.running(&project.shift).unwrap();
        let alone = crate::study::shift::forecast(&running).unwrap();
        let plan = crate::study::shift::plan_top_ups(&running, 0, project.shift.replenish, true).unwrap();
        let svg = shift::to_svg(&running, &alone, &plan);
        assert_well_formed(&svg);
        assert!(!svg.contains("NaN") && !svg.contains("inf\"") && !svg.contains("<b>"), "{file}");
        for top_up in &plan.top_ups {
            assert!(svg.contains(&top_up.measured.amount), "{file}");
        }
        for bail_out in &plan.bail_outs {
            assert!(svg.contains(&format!("bail-out {} L", bail_out.litres)), "{file}");
        }
    }
}
