//! The left panel: volume, pH and temperature with their operating ranges, contents in trade units, limits.

use super::app::App;
use super::theme::{GAP, Text, palette};
use super::widget::{Edit, Evidence, NumberField, RangeBar, Span, evidence};
use crate::bath::{Content, Limit, Ph, Project, Range, Trust};
use crate::chemistry::ComponentKind;
use crate::quantity::{Amount, Dimension, LITRES_PER_US_GALLON, Level, Unit, grouped, plain};
use eframe::egui::{Align, ComboBox, Label, Layout, TextEdit, Ui};

/// Volume at which the picture of the tank is full, relative to today's.
const FULL: f64 = 1.15;
/// Matches offered under the search for a constituent.
const OFFERS: usize = 9;

/// Draws the panel.
pub fn show(app: &mut App, ui: &mut Ui) {
    let mut done: Option<String> = None;
    ui.spacing_mut().item_spacing.y = 4.0;
    tank(app, ui, &mut done);
    ui.add_space(GAP);
    contents(app, ui, &mut done);
    ui.add_space(GAP);
    limits(app, ui, &mut done);
    ui.add_space(GAP);
    if let Some(name) = done {
        app.document.settle(&name);
    }
}

/// The message of an error beside the field that it names.
fn error_under(app: &App, ui: &mut Ui, field: &str) {
    if let Some(error) = app.error.as_ref().filter(|error| error.field().starts_with(field)) {
        ui.label(Text::Small.rich(error.to_string(), palette(ui).not_held));
    }
}

fn tank(app: &mut App, ui: &mut Ui, done: &mut Option<String>) {
    let p = palette(ui);
    ui.label(Text::Heading.rich("Tank", p.ink));
    let tank = &mut app.document.project.tank;
    ui.horizontal(|ui| {
        super::widget::tank_glyph(
            ui,
            eframe::egui::vec2(84.0, 56.0),
            1.0 / FULL,
            "tank, filled to the working volume",
        );
        ui.vertical(|ui| {
            ui.label(Text::Strong.rich(format!("{} L in the tank", grouped(tank.volume_l, 0)), p.ink));
            ui.label(
                Text::Small.rich(format!("{} gal", grouped(tank.volume_l / LITRES_PER_US_GALLON, 0)), p.ink2),
            );
        });
    });
    row(ui, "Working volume", |ui| {
        let edit = NumberField::new("working volume")
            .unit("L")
            .range(0.001..=1e7)
            .step(10.0)
            .show(ui, tank.volume_l);
        take(edit, &mut tank.volume_l)
    })
    .then_name(done, |value| format!("volume to {} L", plain(value, 1)));
    error_under(app, ui, "tank.volume_l");
    ph(app, ui, done);
    let tank = &mut app.document.project.tank;
    range_row(ui, "Temperature", "°C", 1.0, (0.0, 100.0), &mut tank.temperature_c, done);
    error_under(app, ui, "tank.temperature_c");
}

fn ph(app: &mut App, ui: &mut Ui, done: &mut Option<String>) {
    let p = palette(ui);
    let tank = &mut app.document.project.tank;
    let mut held = tank.ph.range().is_some();
    if let Some(mut range) = tank.ph.range() {
        range_row(ui, "pH at bath temperature", "", 0.05, (-1.0, 15.0), &mut range, done);
        tank.ph = Ph::from(range);
    } else {
        ui.separator();
        let predicted = app
            .quick
            .as_ref()
            .and_then(|quick| quick.bath.system.proton.map(|proton| quick.solution.ph(proton)));
        ui.horizontal(|ui| {
            ui.label("pH, predicted");
            ui.label(Text::Strong.rich(predicted.map_or("–".to_owned(), |ph| format!("{ph:.2}")), p.ink));
        });
    }
    let tank = &mut app.document.project.tank;
    if ui.checkbox(&mut held, Text::Small.rich("pH is held with acid or alkali", p.ink2)).changed() {
        let now = app.quick.as_ref().and_then(|q| q.bath.system.proton.map(|proton| q.solution.ph(proton)));
        let set = (now.unwrap_or(7.0) * 20.0).round() / 20.0;
        tank.ph = if held { Ph::from(Range::new(set - 0.2, set, set + 0.2)) } else { Ph::Predicted };
        *done = Some(if held { "hold the pH".to_owned() } else { "predict the pH".to_owned() });
    }
    error_under(app, ui, "tank.ph");
}

/// What a field did: a value changed, or an edit ended.
struct Change(Option<f64>);

impl Change {
    fn then_name(self, done: &mut Option<String>, name: impl FnOnce(f64) -> String) {
        if let Some(value) = self.0 {
            *done = Some(name(value));
        }
    }
}

fn take(edit: Edit<f64>, value: &mut f64) -> Change {
    match edit.value {
        Some(new) => {
            *value = new;
            Change(Some(new))
        }
        None => Change(None),
    }
}

/// A line with a name on the left and a field on the right.
fn row(ui: &mut Ui, name: &str, field: impl FnOnce(&mut Ui) -> Change) -> Change {
    ui.separator();
    ui.horizontal(|ui| {
        ui.label(name);
        ui.with_layout(Layout::right_to_left(Align::Center), field).inner
    })
    .inner
}

/// A set point with its operating range: field, bar, and the range in words.
fn range_row(
    ui: &mut Ui,
    name: &str,
    unit: &str,
    step: f64,
    (least, most): (f64, f64),
    range: &mut Range,
    done: &mut Option<String>,
) {
    let p = palette(ui);
    row(ui, name, |ui| {
        let field = NumberField::new(name).unit(unit).range(least..=most).decimals(2).step(step);
        let edit = field.show(ui, range.set);
        if let Some(set) = edit.value {
            // A new set point outside the range takes the range along.
            let shift = if set < range.low || set > range.high { set - range.set } else { 0.0 };
            *range = Range::new((range.low + shift).max(least), set, (range.high + shift).min(most));
        }
        Change(edit.value)
    })
    .then_name(done, |value| format!("{name} to {} {unit}", plain(value, 2)));
    let width = (range.high - range.low).max(4.0 * step);
    let track = (range.low - width).max(least)..=(range.high + width).min(most);
    let id = ui.scope_id().with((name, "track"));
    // The track keeps still while an end is dragged on it.
    let dragged = ui.ctx().egui_is_using_pointer();
    let track = ui.data_mut(|data| {
        let kept = data.get_temp_mut_or_insert_with(id, || track.clone());
        if !dragged {
            *kept = track;
        }
        kept.clone()
    });
    let bar_name = format!("{name} operating range");
    let bar = RangeBar::new(&bar_name, unit, track).step(step);
    let edit = bar.show(ui, Span { low: range.low, set: range.set, high: range.high });
    if let Some(Span { low, set, high }) = edit.value {
        *range = Range::new(low, set, high);
    }
    if edit.done {
        *done = Some(format!("{name} range"));
    }
    ui.label(
        Text::Small
            .rich(format!("operating range {} to {}", plain(range.low, 2), plain(range.high, 2)), p.ink2),
    );
}

/// What a line of the contents is called, and whether it is a bought product, a liquid.
struct Naming {
    name: String,
    product: bool,
    liquid: bool,
}

fn naming(app: &App, what: &str) -> Naming {
    let Some(quick) = &app.quick else {
        return Naming { name: what.to_owned(), product: false, liquid: false };
    };
    let bath = &quick.bath;
    if bath.library.component(what).is_none()
        && let Some(product) = bath.catalogue.find(what)
    {
        return Naming { name: product.name.clone(), product: true, liquid: product.is_liquid() };
    }
    let name = match bath.library.component_named(what) {
        Some(index) => {
            let component = &bath.library.components[index];
            let acid = if component.acid_form.is_some() { ", as acid" } else { "" };
            format!("{}{acid}", capital(&component.name))
        }
        None => crate::chemistry::pretty(what),
    };
    Naming { name, product: false, liquid: false }
}

fn capital(text: &str) -> String {
    let mut letters = text.chars();
    letters.next().map_or_else(String::new, |first| first.to_uppercase().chain(letters).collect())
}

fn contents(app: &mut App, ui: &mut Ui, done: &mut Option<String>) {
    let p = palette(ui);
    ui.label(Text::Heading.rich("In the bath", p.ink));
    let mut removed = None;
    for index in 0..app.document.project.contents.len() {
        let naming = naming(app, &app.document.project.contents[index].what);
        ui.push_id(("content", index), |ui| {
            if content(&mut app.document.project.contents[index], &naming, ui, done) {
                removed = Some(index);
            }
        });
        error_under(app, ui, &format!("contents[{index}]"));
    }
    if let Some(index) = removed {
        let gone = app.document.project.contents.remove(index);
        *done = Some(format!("remove {}", gone.what));
    }
    if app.document.project.contents.is_empty() {
        ui.label(Text::Body.rich("Nothing yet. Add a metal or a product below.", p.ink2));
    }
    add_content(app, ui, done);
}

/// One line; true when it is to be removed.
fn content(content: &mut Content, naming: &Naming, ui: &mut Ui, done: &mut Option<String>) -> bool {
    let mut remove = false;
    ui.separator();
    ui.horizontal(|ui| {
        ui.with_layout(Layout::right_to_left(Align::Center), |ui| {
            let remove_it = format!("Remove {}", naming.name);
            remove = ui.small_button("×").on_hover_text(remove_it).clicked();
            name_on_the_left(ui, &naming.name);
        });
    });
    let (mark, word) = match content.trust {
        Trust::Today => (Evidence::Today, Trust::Earlier),
        Trust::Earlier => (Evidence::Earlier, Trust::Inferred),
        Trust::Inferred => (Evidence::Inferred, Trust::Assumed),
        Trust::Assumed => (Evidence::Assumed, Trust::Today),
    };
    ui.horizontal(|ui| {
        ui.with_layout(Layout::right_to_left(Align::Center), |ui| {
            unit_box(content, naming, ui, done);
            let field = NumberField::new("amount").range(0.0..=1e6).step(0.1).show(ui, content.amount.value);
            take(field, &mut content.amount.value).then_name(done, |value| {
                format!("{} to {} {}", naming.name, plain(value, 4), content.amount.unit.symbol())
            });
            ui.with_layout(Layout::left_to_right(Align::Center), |ui| {
                let pips = evidence(ui, mark, "").interact(eframe::egui::Sense::click());
                let note =
                    if content.note.is_empty() { String::new() } else { format!("{}. ", content.note) };
                if pips.on_hover_text(format!("{note}What this number rests on; click to change")).clicked() {
                    content.trust = word;
                    *done = Some(format!("{} {}", naming.name, word.word()));
                }
            });
        });
    });
    remove
}

/// A name in what is left of a row, from its left edge; the whole of it on hover.
pub(super) fn name_on_the_left(ui: &mut Ui, name: &str) {
    ui.with_layout(Layout::left_to_right(Align::Center), |ui| {
        ui.add(Label::new(Text::Strong.rich(name, palette(ui).ink)).truncate()).on_hover_text(name);
    });
}

fn unit_box(content: &mut Content, naming: &Naming, ui: &mut Ui, done: &mut Option<String>) {
    let fits = |unit: &Unit| match unit.dimension() {
        Dimension::Mass | Dimension::Mole => true,
        Dimension::Volume => naming.liquid,
        Dimension::Hardness => !naming.product,
    };
    let before = content.amount.unit;
    ComboBox::from_id_salt("unit")
        .width(64.0)
        .selected_text(before.symbol())
        .show_ui(ui, |ui| {
            for unit in Unit::ALL.into_iter().filter(fits) {
                ui.selectable_value(&mut content.amount.unit, unit, unit.symbol());
            }
        })
        .response
        .on_hover_text("unit of the amount");
    if content.amount.unit != before {
        // Between units of one dimension the bath stays the same; otherwise the number stays.
        if content.amount.unit.dimension() == before.dimension() {
            content.amount.value *= before.factor() / content.amount.unit.factor();
        }
        *done = Some(format!("{} in {}", naming.name, content.amount.unit.symbol()));
    }
}

fn add_content(app: &mut App, ui: &mut Ui, done: &mut Option<String>) {
    let Some(quick) = &app.quick else {
        fallback_add(&mut app.document.project, ui, done);
        return;
    };
    let id = ui.scope_id().with("add content");
    let mut text: String = ui.data(|data| data.get_temp(id)).unwrap_or_default();
    ui.separator();
    let hint = "Add: metal, agent or product";
    let response = ui.add(TextEdit::singleline(&mut text).hint_text(hint).desired_width(f32::INFINITY));
    response.widget_info(|| eframe::egui::WidgetInfo::labeled(eframe::egui::Role::TextInput, true, hint));
    let needle = text.trim().to_lowercase();
    let mut chosen = None;
    if !needle.is_empty() {
        let bath = &quick.bath;
        let components = bath.library.components.iter().filter(|c| c.kind != ComponentKind::Proton);
        let metals = components.map(|c| {
            (c.token.clone(), format!("{} ({})", capital(&c.name), crate::chemistry::pretty(&c.token)))
        });
        let products = bath.catalogue.iter().map(|product| (product.id.clone(), product.name.clone()));
        let matches = metals.chain(products).filter(|(key, name)| {
            key.to_lowercase().contains(&needle) || name.to_lowercase().contains(&needle)
        });
        for (key, name) in matches.take(OFFERS) {
            if ui.selectable_label(false, &name).clicked() {
                chosen = Some((key, name));
            }
        }
    }
    if let Some((what, name)) = chosen {
        let amount = Amount::new(1.0, Unit::GramPerLitre);
        app.document.project.contents.push(Content {
            what,
            amount,
            trust: Trust::Assumed,
            note: String::new(),
        });
        *done = Some(format!("add {name}"));
        text.clear();
    }
    ui.data_mut(|data| data.insert_temp(id, text));
}

/// Before the first bath is solved there is no catalogue at hand: offer the commonest metal to start with.
fn fallback_add(project: &mut Project, ui: &mut Ui, done: &mut Option<String>) {
    ui.separator();
    ui.label("Start with a metal:");
    ui.horizontal_wrapped(|ui| {
        for metal in ["copper", "nickel", "zinc", "iron(III)", "calcium"] {
            if ui.button(metal).clicked() {
                let amount = Amount::new(1.0, Unit::GramPerLitre);
                let what = metal.to_owned();
                project.contents.push(Content { what, amount, trust: Trust::Assumed, note: String::new() });
                *done = Some(format!("add {metal}"));
            }
        }
    });
}

fn limits(app: &mut App, ui: &mut Ui, done: &mut Option<String>) {
    let p = palette(ui);
    ui.label(Text::Heading.rich("Limits on free metal", p.ink));
    let mut removed = None;
    for index in 0..app.document.project.limits.len() {
        ui.push_id(("limit", index), |ui| {
            if limit(&mut app.document.project.limits[index], ui, done) {
                removed = Some(index);
            }
        });
        error_under(app, ui, &format!("limits[{index}]"));
    }
    if let Some(index) = removed {
        let gone = app.document.project.limits.remove(index);
        *done = Some(format!("remove the limit of {}", gone.metal));
    }
    add_limit(app, ui, done);
}

/// One limit; true when it is to be removed.
fn limit(limit: &mut Limit, ui: &mut Ui, done: &mut Option<String>) -> bool {
    let p = palette(ui);
    let mut remove = false;
    ui.separator();
    ui.horizontal(|ui| {
        ui.label(Text::Strong.rich(capital(&limit.metal), p.ink));
        ui.with_layout(Layout::right_to_left(Align::Center), |ui| {
            if ui.small_button("×").on_hover_text("Remove this limit").clicked() {
                remove = true;
            }
        });
    });
    let metal = limit.metal.clone();
    for (name, level) in [("ceiling", &mut limit.ceiling), ("floor", &mut limit.floor)] {
        ui.horizontal(|ui| {
            ui.label(name);
            ui.with_layout(Layout::right_to_left(Align::Center), |ui| {
                level_field(ui, &format!("{name} of {metal}"), level, done);
            });
        });
    }
    if !limit.wall.is_empty() {
        ui.label(Text::Small.rich(&limit.wall, p.ink2));
    }
    remove
}

/// A level typed as "pM 10.8", "2e-8 mol/L" or "0.05 mg/L"; empty for none.
fn level_field(ui: &mut Ui, name: &str, level: &mut Option<Level>, done: &mut Option<String>) {
    let id = ui.scope_id().with(("level", name));
    let current = level.map_or(String::new(), |level| level.to_string());
    let mut text: String = ui.data(|data| data.get_temp(id)).unwrap_or_else(|| current.clone());
    let response = ui.add(TextEdit::singleline(&mut text).hint_text("none").desired_width(120.0));
    response.widget_info(|| {
        let mut info = eframe::egui::WidgetInfo::labeled(eframe::egui::Role::TextInput, true, name);
        info.current_text_value = Some(text.clone());
        info
    });
    if response.lost_focus() {
        let typed = text.trim();
        match if typed.is_empty() { Ok(None) } else { Level::parse(typed).map(Some) } {
            Ok(new) => {
                if new != *level {
                    *level = new;
                    *done = Some(format!("{name} {typed}"));
                }
                ui.data_mut(|data| data.remove::<String>(id));
            }
            Err(error) => {
                ui.data_mut(|data| data.insert_temp(id, text));
                response.on_hover_text(error.to_string());
            }
        }
    } else if response.has_focus() {
        ui.data_mut(|data| data.insert_temp(id, text));
    } else if Level::parse(&text).is_ok() || text.is_empty() {
        ui.data_mut(|data| data.remove::<String>(id));
    } else {
        response.on_hover_text("write it like \"pM 10.8\", \"2e-8 mol/L\" or \"0.05 mg/L\"");
    }
}

fn add_limit(app: &mut App, ui: &mut Ui, done: &mut Option<String>) {
    let Some(quick) = &app.quick else { return };
    let bath = &quick.bath;
    let open: Vec<(String, f64)> = bath
        .metals()
        .filter(|&metal| {
            quick.solution.free(metal) > 0.0 && bath.limits.iter().all(|limit| limit.component != metal)
        })
        .map(|metal| {
            (bath.component(metal).name.clone(), -quick.solution.ln_c[metal] / crate::equilibrium::LN_10)
        })
        .collect();
    if open.is_empty() {
        return;
    }
    let mut chosen = None;
    ComboBox::from_id_salt("add limit")
        .selected_text("Add a limit")
        .width(140.0)
        .show_ui(ui, |ui| {
            for (name, p) in &open {
                if ui.selectable_label(false, name).clicked() {
                    chosen = Some((name.clone(), *p));
                }
            }
        })
        .response
        .on_hover_text("metal to limit");
    if let Some((metal, p)) = chosen {
        // A ceiling where the bath stands now: something to move, and no verdict made up.
        let ceiling = Some(Level::P((p * 10.0).round() / 10.0));
        let wall = "typed, from shop experience".to_owned();
        app.document.project.limits.push(Limit { metal: metal.clone(), ceiling, wall, ..Limit::default() });
        *done = Some(format!("add a limit for {metal}"));
    }
}
