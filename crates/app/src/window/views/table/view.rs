use std::sync::Arc;

use egui::{EventFilter, Key, Rect, Response, Role, Sense, TextEdit, Ui, WidgetInfo, pos2};
use egui_extras::{TableBuilder, TableRow};
use ringwright_core::frames::Hkl;

use super::super::super::{Picked, Reach, Results};
use super::super::number::grouped;
use super::super::palette::ShownKinds;
use super::cell;
use super::column::Column;
use super::filter::Filter;
use super::layout;
use super::order::{Order, Question, Sorting};
use super::parts::{arrow, bound, empty};

/// The table of reflections, with its filter and its order.
#[derive(Debug, Default)]
pub struct ReflectionTable {
    text: String,
    d_least: Option<f64>,
    d_most: Option<f64>,
    sorting: Option<Sorting>,
    order: Order,
    spread: Option<(Arc<Reach>, [f64; 2])>,
    /// The selection that the table last showed, so that one from elsewhere is scrolled to.
    seen: Option<Hkl>,
    /// The place of the selection in the order.
    place: Option<usize>,
    #[cfg(test)]
    orders_made: usize,
}

const ROW_HEIGHT: f32 = 20.0;

impl ReflectionTable {
    /// Shows filter and table in the space that is left. A click on a row selects it.
    pub fn show(&mut self, ui: &mut Ui, results: &Results, picked: &mut Picked, shown: &mut ShownKinds) {
        let Some(reach) = &results.reach else {
            return empty(
                ui,
                "No reflections yet",
                "They appear with the orientation: give a cell, a wavelength and two found peaks.",
            );
        };
        if reach.table.is_empty() {
            return empty(
                ui,
                "No reflection in the targets",
                "Widen the range of d or 2θ, or list indices of your own.",
            );
        }
        let filter = self.filter_row(ui, reach);
        let question =
            Question { sorting: self.sorting, filter, shown: *shown, d_least: self.d_least, d_most: self.d_most };
        let made = self.order.update(reach, &question);
        #[cfg(test)]
        {
            self.orders_made += usize::from(made);
        }
        if made {
            ui.ctx().request_repaint();
        }
        Self::hidden_row(ui, shown);
        let moved = picked.hkl != self.seen;
        if made || moved {
            self.place = picked.hkl.and_then(|hkl| place_of(hkl, reach, self.order.rows()));
        }
        if self.order.rows().is_empty() {
            return empty(
                ui,
                "No reflection meets the conditions",
                "Clear the filter, or show more verdicts in the legend.",
            );
        }
        let scroll_to = if moved { self.place } else { None };
        self.seen = picked.hkl;
        self.body(ui, reach, picked, scroll_to);
    }

    /// How often the rows have been put in order.
    #[cfg(test)]
    pub fn orders_made(&self) -> usize {
        self.orders_made
    }

    fn filter_row(&mut self, ui: &mut Ui, reach: &Arc<Reach>) -> Filter {
        let read = Filter::read(&self.text, &reach.instrument);
        let [least, most] = self.spread(reach);
        ui.horizontal_wrapped(|ui| {
            let name = ui.label("Filter");
            let edit = TextEdit::singleline(&mut self.text).hint_text("0 0 *   d 0.8..1.5   reachable").desired_width(206.0);
            let help = "Conditions that must all hold:\n1 0 2   or   0 0 *   with * for any index\nd 0.8..1.5   2theta < 60   \
                        h = 0   a column and its range\nreachable   over_limit   absent   and \"not\" before any";
            ui.add(edit).labelled_by(name.id).on_hover_text(help);
            bound(ui, "d from", &mut self.d_least, least, [least, self.d_most.unwrap_or(most)]);
            bound(ui, "to", &mut self.d_most, most, [self.d_least.unwrap_or(least), most]);
            let active = !self.text.is_empty() || self.d_least.is_some() || self.d_most.is_some();
            if active && ui.button("Clear filter").clicked() {
                self.text.clear();
                (self.d_least, self.d_most) = (None, None);
            }
            self.count(ui, reach);
        });
        match read {
            Ok(filter) => filter,
            Err(problem) => {
                ui.colored_label(ui.visuals().error_fg_color, problem);
                Filter::default()
            }
        }
    }

    /// The smallest and the largest spacing of the table.
    fn spread(&mut self, reach: &Arc<Reach>) -> [f64; 2] {
        if let Some((made_for, spread)) = &self.spread
            && Arc::ptr_eq(made_for, reach)
        {
            return *spread;
        }
        let spacings = reach.table.rows().map(|row| row.d_angstrom);
        let spread = spacings.fold([f64::INFINITY, 0.0], |[least, most]: [f64; 2], d| [least.min(d), most.max(d)]);
        self.spread = Some((Arc::clone(reach), spread));
        spread
    }

    /// How many rows are shown: those of the frame before, which is asked for again where it was another number.
    fn count(&self, ui: &mut Ui, reach: &Reach) {
        let (some, all) = (self.order.rows().len(), reach.table.len());
        ui.weak(if some == all {
            format!("{} reflections", grouped(all))
        } else {
            format!("{} of {} reflections", grouped(some), grouped(all))
        });
    }

    fn hidden_row(ui: &mut Ui, shown: &mut ShownKinds) {
        if shown.is_everything() {
            return;
        }
        ui.horizontal_wrapped(|ui| {
            ui.weak("Some verdicts are hidden.");
            if ui.small_button("Show every verdict").clicked() {
                *shown = ShownKinds::default();
            }
        });
    }

    fn body(&mut self, ui: &mut Ui, reach: &Reach, picked: &mut Picked, scroll_to: Option<usize>) {
        let area = ui.available_rect_before_wrap();
        let keys = ui.interact(area, ui.scope_id().with("reflections"), Sense::focusable_noninteractive());
        let label = format!("Reflections, {} rows", self.order.rows().len());
        keys.widget_info(|| WidgetInfo::labeled(Role::Table, true, &label));
        let step = self.step_by_keys(ui, &keys, area);
        let scroll_to = step.or(scroll_to);
        if let Some(hkl) = step.and_then(|place| self.hkl_at(reach, place)) {
            (picked.hkl, self.seen, self.place) = (Some(hkl), Some(hkl), step);
        }
        let columns: Vec<Column> = Column::all(reach.instrument.axis_count()).collect();
        let mut clicked = None;
        let detail = layout::detail_width(area.width(), reach.instrument.axis_count());
        ui.push_id("table", |ui| {
            ui.spacing_mut().item_spacing.x = 2.0;
            let mut table = TableBuilder::new(ui)
                .striped(true)
                .sense(Sense::click())
                .auto_shrink(false)
                .min_scrolled_height(0.0)
                .animate_scrolling(false);
            for column in &columns {
                table = table.column(layout::width(*column, detail));
            }
            if let Some(place) = scroll_to {
                table = table.scroll_to_row(place, None);
            }
            let table = table.header(24.0, |mut row| {
                for column in &columns {
                    row.col(|ui| self.header(ui, *column, reach));
                }
            });
            let (rows, place) = (self.order.rows(), self.place);
            table.body(|body| {
                body.rows(ROW_HEIGHT, rows.len(), |mut row| {
                    let at = row.index();
                    if let Some(data) = rows.get(at).and_then(|i| reach.table.row(*i as usize)) {
                        row.set_selected(place == Some(at));
                        if picked.hovered == Some(data.hkl) {
                            row.set_hovered(true);
                        }
                        for column in &columns {
                            row.col(|ui| cell::write(ui, *column, &data, reach));
                        }
                        if answer(&row, place == Some(at), || cell::spoken(&data, reach), &mut picked.hovered, data.hkl)
                        {
                            clicked = Some((at, data.hkl));
                        }
                        let response = row.response();
                        if response.hovered()
                            && let Some(more) = cell::not_in_sight(&response.ctx, &data, reach, detail)
                        {
                            response.on_hover_text(more);
                        }
                    }
                });
            });
        });
        if let Some((at, hkl)) = clicked {
            (picked.hkl, self.seen, self.place) = (Some(hkl), Some(hkl), Some(at));
            keys.request_focus();
        }
    }

    fn hkl_at(&self, reach: &Reach, place: usize) -> Option<Hkl> {
        let row = *self.order.rows().get(place)?;
        reach.table.row(row as usize).map(|row| row.hkl)
    }

    /// The place that the keyboard goes to, if it does.
    fn step_by_keys(&self, ui: &Ui, keys: &Response, area: Rect) -> Option<usize> {
        if !keys.has_focus() {
            return None;
        }
        let filter = EventFilter { vertical_arrows: true, ..EventFilter::default() };
        ui.memory_mut(|memory| memory.set_focus_lock_filter(keys.id, filter));
        let page = (area.height() / ROW_HEIGHT) as isize - 2;
        let last = self.order.rows().len().checked_sub(1)?;
        let pressed = |key| ui.input(|input| input.num_presses(key)) as isize;
        let by =
            pressed(Key::ArrowDown) - pressed(Key::ArrowUp) + page * (pressed(Key::PageDown) - pressed(Key::PageUp));
        if pressed(Key::Home) > 0 {
            return Some(0);
        }
        if pressed(Key::End) > 0 {
            return Some(last);
        }
        let from = self.place.map_or(-1, |place| place as isize);
        (by != 0).then(|| from.saturating_add(by).clamp(0, last as isize) as usize)
    }

    fn header(&mut self, ui: &mut Ui, column: Column, reach: &Reach) {
        let title = column.title(&reach.instrument);
        let rect = ui.max_rect();
        let response = ui.interact(rect, ui.scope_id().with("sort"), Sense::click());
        let sorted = self.sorting.filter(|sorting| sorting.column == column);
        let spoken = match sorted {
            None => format!("Sort by {title}"),
            Some(Sorting { descending: false, .. }) => format!("Sort by {title}, rising now"),
            Some(_) => format!("Sort by {title}, falling now"),
        };
        response.widget_info(|| WidgetInfo::labeled(Role::ColumnHeader, true, &spoken));
        if response.clicked() {
            self.sorting = match sorted {
                None => Some(Sorting { column, descending: false }),
                Some(Sorting { descending: false, .. }) => Some(Sorting { column, descending: true }),
                Some(_) => None,
            };
        }
        let colour = if response.hovered() || sorted.is_some() {
            ui.visuals().strong_text_color()
        } else {
            ui.visuals().text_color()
        };
        let font = egui::TextStyle::Body.resolve(ui.style());
        let galley = ui.painter().layout_no_wrap(title, font, colour);
        let left = if column.is_number() { rect.right() - galley.size().x } else { rect.left() + cell::LEFT_PAD };
        let at = pos2(left, rect.center().y - 0.5 * galley.size().y);
        let beside = if column.is_number() { left - 9.0 } else { left + galley.size().x + 9.0 };
        ui.painter().galley(at, galley, colour);
        if let Some(sorting) = sorted {
            arrow(ui, pos2(beside, rect.center().y), sorting.descending, colour);
        }
        response.on_hover_text(column.meaning());
    }
}

/// What a row does with the pointer: it is read out, hovered, clicked. Answers whether it was clicked.
fn answer(
    row: &TableRow<'_, '_>,
    selected: bool,
    spoken: impl Fn() -> String,
    hovered: &mut Option<Hkl>,
    hkl: Hkl,
) -> bool {
    let response = row.response();
    response.widget_info(|| WidgetInfo::selected(Role::Row, true, selected, spoken()));
    if response.hovered() {
        *hovered = Some(hkl);
    }
    response.clicked()
}

fn place_of(hkl: Hkl, reach: &Reach, rows: &[u32]) -> Option<usize> {
    rows.iter().position(|row| reach.table.row(*row as usize).is_some_and(|row| row.hkl == hkl))
}
