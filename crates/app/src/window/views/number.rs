//! Numbers as people read them: a minus sign that can be seen, no negative zero, groups of three.

/// A number with a fixed count of decimals and a true minus sign (U+2212).
pub(super) fn fixed(value: f64, decimals: usize) -> String {
    let text = format!("{value:.decimals$}");
    match text.strip_prefix('-') {
        Some(size) if size.bytes().all(|b| matches!(b, b'0' | b'.')) => size.to_owned(),
        Some(size) => format!("−{size}"),
        None => text,
    }
}

/// Indices with a true minus sign, with as many decimals as they need, each at least `width` wide.
pub(super) fn indices(hkl: ringwright_core::frames::Hkl, width: usize) -> String {
    let one = |x: f64| {
        let rounded = (x * 1e4).round() / 1e4 + 0.0;
        format!("{:>width$}", rounded.to_string().replace('-', "−"))
    };
    format!("{} {} {}", one(hkl.h), one(hkl.k), one(hkl.l))
}

/// A count with thin groups of three.
pub(super) fn grouped(count: usize) -> String {
    let digits = count.to_string();
    let mut text = String::with_capacity(digits.len() + digits.len() / 3);
    for (i, digit) in digits.chars().enumerate() {
        if i > 0 && (digits.len() - i).is_multiple_of(3) {
            text.push('\u{a0}');
        }
        text.push(digit);
    }
    text
}

#[cfg(test)]
mod tests {
    use super::*;
    use ringwright_core::frames::Hkl;

    #[test]
    fn minus_is_seen_and_zero_has_none() {
        assert_eq!(fixed(-1.25, 1), "−1.2");
        assert_eq!(fixed(-0.004, 2), "0.00");
        assert_eq!(fixed(12.3456, 3), "12.346");
        assert_eq!(indices(Hkl::new(1.0, -2.0, 0.5), 0), "1 −2 0.5");
        assert_eq!(indices(Hkl::new(-0.0, 10.0, 3.0), 3), "  0  10   3");
    }

    #[test]
    fn thousands_are_grouped() {
        assert_eq!(grouped(0), "0");
        assert_eq!(grouped(999), "999");
        assert_eq!(grouped(1_023_348), "1\u{a0}023\u{a0}348");
    }
}
