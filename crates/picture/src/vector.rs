//! The little arithmetic on three numbers that the crate needs.

pub(crate) type V3 = [f64; 3];

pub(crate) fn add(a: V3, b: V3) -> V3 {
    [a[0] + b[0], a[1] + b[1], a[2] + b[2]]
}

pub(crate) fn sub(a: V3, b: V3) -> V3 {
    [a[0] - b[0], a[1] - b[1], a[2] - b[2]]
}

pub(crate) fn scale(a: V3, factor: f64) -> V3 {
    [a[0] * factor, a[1] * factor, a[2] * factor]
}

pub(crate) fn dot(a: V3, b: V3) -> f64 {
    a[0] * b[0] + a[1] * b[1] + a[2] * b[2]
}

pub(crate) fn cross(a: V3, b: V3) -> V3 {
    [a[1] * b[2] - a[2] * b[1], a[2] * b[0] - a[0] * b[2], a[0] * b[1] - a[1] * b[0]]
}

pub(crate) fn length(a: V3) -> f64 {
    dot(a, a).sqrt()
}

/// The direction of `a`; `None` where it has none (zero, not finite, or too long or short to square).
pub(crate) fn unit(a: V3) -> Option<V3> {
    let norm = length(a);
    (norm.is_finite() && norm > f64::MIN_POSITIVE.sqrt()).then(|| scale(a, 1.0 / norm))
}

/// Some unit vector perpendicular to the unit vector `a`.
pub(crate) fn any_perpendicular(a: V3) -> V3 {
    // The axis least along `a` cannot be parallel to it, so the fallback is never reached for a unit vector.
    let axes = [[0.0, 0.0, 1.0], [1.0, 0.0, 0.0], [0.0, 1.0, 0.0]];
    let mut best = axes[0];
    for axis in axes {
        if dot(a, axis).abs() < dot(a, best).abs() - 1e-9 {
            best = axis;
        }
    }
    unit(sub(best, scale(a, dot(a, best)))).unwrap_or(best)
}

pub(crate) fn is_finite(a: V3) -> bool {
    a.iter().all(|v| v.is_finite())
}
