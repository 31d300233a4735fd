use egui_extras::Column as Width;

use super::column::Column;

/// Widths of the columns before the detail, with the gaps and the scroll bar.
const BEFORE_DETAIL: f32 = 78.0 + 52.0 + 56.0 + 54.0 + 108.0 + 5.0 * 2.0 + 8.0;
/// Width of the detail where there is room for everything.
const DETAIL_WIDTH: f32 = 270.0;

/// Wide enough for what is in it; up to the detail they fit beside each other in the window of a laptop.
pub(super) fn width(column: Column, detail: f32) -> Width {
    match column {
        Column::Hkl => Width::exact(78.0),
        Column::Spacing => Width::exact(52.0),
        Column::TwoTheta => Width::exact(56.0),
        Column::Absent => Width::exact(54.0),
        Column::Verdict => Width::exact(108.0),
        Column::Detail => Width::exact(detail),
        Column::Axis(_) => Width::initial(80.0).at_least(70.0),
    }
}

/// Width of the detail. Where the axes find no room beside it, it takes what is left and they lie beyond the edge.
pub(super) fn detail_width(room: f32, axis_count: usize) -> f32 {
    let left = room - BEFORE_DETAIL;
    let detail = if left < DETAIL_WIDTH + 80.0 * axis_count as f32 { left } else { DETAIL_WIDTH };
    detail.max(150.0)
}
