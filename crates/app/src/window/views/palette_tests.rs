use super::*;

/// sRGB to linear (IEC 61966-2-1).
fn linear(c: Color32) -> [f64; 3] {
    [c.r(), c.g(), c.b()].map(|byte| {
        let v = f64::from(byte) / 255.0;
        if v <= 0.04045 { v / 12.92 } else { ((v + 0.055) / 1.055).powf(2.4) }
    })
}

/// Contrast ratio of WCAG 2.1.
fn contrast(a: Color32, b: Color32) -> f64 {
    let luminance = |c| {
        let [r, g, b] = linear(c);
        0.2126 * r + 0.7152 * g + 0.0722 * b
    };
    let (a, b) = (luminance(a), luminance(b));
    (a.max(b) + 0.05) / (a.min(b) + 0.05)
}

type Matrix = [[f64; 3]; 3];

/// Full protanopia, deuteranopia and tritanopia on linear RGB: Machado, Oliveira & Fernandes (2009), IEEE Trans. Vis.
/// Comput. Graph. 15, 1291; the digits are from memory.
const DEFICIENCIES: [Matrix; 4] = [
    [[1.0, 0.0, 0.0], [0.0, 1.0, 0.0], [0.0, 0.0, 1.0]],
    [[0.152286, 1.052583, -0.204868], [0.114503, 0.786281, 0.099216], [-0.003882, -0.048116, 1.051998]],
    [[0.367322, 0.860646, -0.227968], [0.280085, 0.672501, 0.047413], [-0.011820, 0.042940, 0.968881]],
    [[1.255528, -0.076749, -0.178779], [-0.078411, 0.930809, 0.147602], [0.004733, 0.691367, 0.303900]],
];

/// CIE L*a*b* under D65, of linear sRGB.
fn lab(rgb: [f64; 3]) -> [f64; 3] {
    let apply = |m: &Matrix, v: [f64; 3]| m.map(|row| row[0] * v[0] + row[1] * v[1] + row[2] * v[2]);
    let to_xyz = [[0.4124, 0.3576, 0.1805], [0.2126, 0.7152, 0.0722], [0.0193, 0.1192, 0.9505]];
    let [x, y, z] = apply(&to_xyz, rgb);
    let f = |t: f64| if t > 216.0 / 24389.0 { t.cbrt() } else { (24389.0 / 27.0 * t + 16.0) / 116.0 };
    let (fx, fy, fz) = (f(x / 0.9505), f(y), f(z / 1.089));
    [116.0 * fy - 16.0, 500.0 * (fx - fy), 200.0 * (fy - fz)]
}

fn distance(a: Color32, b: Color32, deficiency: &Matrix) -> f64 {
    let seen = |c| {
        let v = linear(c);
        lab(deficiency.map(|row| (row[0] * v[0] + row[1] * v[1] + row[2] * v[2]).clamp(0.0, 1.0)))
    };
    let (a, b) = (seen(a), seen(b));
    a.iter().zip(b).map(|(x, y)| (x - y) * (x - y)).sum::<f64>().sqrt()
}

#[test]
fn kinds_follow_the_order_of_the_words() {
    for (i, kind) in Kind::ALL.into_iter().enumerate() {
        assert_eq!(kind.index(), i);
    }
    let over = Verdict::OverLimit { axis: 0, by_deg: 1.0 };
    assert_eq!(Kind::of(over).index(), over.kind());
    assert_eq!(Kind::of(Verdict::CannotMake { by_deg: 1.0 }).index(), Verdict::CannotMake { by_deg: 1.0 }.kind());
}

#[test]
fn no_two_kinds_share_a_shape() {
    let marks: std::collections::HashSet<Mark> = Kind::ALL.into_iter().map(Kind::mark).collect();
    assert_eq!(marks.len(), Kind::ALL.len());
}

#[test]
fn every_pair_of_kinds_is_told_apart_by_every_eye() {
    // 10 in L*a*b* (CIE 1976) is seen at a glance side by side; small marks need more.
    const AT_LEAST: f64 = 20.0;
    for palette in [&DARK, &LIGHT] {
        for deficiency in &DEFICIENCIES {
            for (i, a) in Kind::ALL.into_iter().enumerate() {
                for b in &Kind::ALL[..i] {
                    let apart = distance(palette.kind(a), palette.kind(*b), deficiency);
                    assert!(apart > AT_LEAST, "{a:?} and {b:?} are only {apart:.1} apart: {deficiency:?}");
                }
            }
        }
    }
}

#[test]
fn marks_have_three_to_one_and_text_four_and_a_half_to_one() {
    for palette in [&DARK, &LIGHT] {
        let marks = Kind::ALL.map(|kind| palette.kind(kind));
        for mark in marks.into_iter().chain([palette.q, palette.axis, palette.beam, palette.hovered]) {
            let ratio = contrast(mark, palette.background);
            assert!(ratio >= 3.0, "{mark:?}: {ratio:.2}");
        }
        assert!(contrast(palette.ink, palette.background) >= 4.5);
    }
}
