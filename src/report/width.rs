//! How wide a text is at most, so that no label overlaps another or is cut.
//!
//! The browser decides which font of the list is used; the figures must hold with any of them.
//! So each advance here is the larger of DejaVu Sans 2.37 and Liberation Sans 2.1, the widest and
//! the most usual of the libre sans fonts (advances in thousandths of the font size, read from
//! their `hmtx` tables with fontTools). Widths are upper bounds, for space to keep free; text that
//! must touch is set in one element.

const ASCII: [u16; 95] = [
    318, 401, 460, 838, 637, 951, 780, 275, 391, 391, 500, 838, 318, 361, 318, 337, 637, 637, 637, 637, 637,
    637, 637, 637, 637, 637, 337, 337, 838, 838, 838, 557, 1016, 685, 687, 723, 771, 667, 611, 778, 752, 295,
    500, 667, 558, 863, 749, 788, 667, 788, 723, 667, 611, 732, 685, 989, 686, 667, 686, 391, 337, 391, 838,
    557, 500, 613, 635, 550, 635, 616, 353, 635, 634, 278, 278, 580, 278, 975, 634, 612, 635, 635, 412, 521,
    393, 634, 592, 818, 592, 592, 525, 637, 337, 637, 838,
];

const ASCII_BOLD: [u16; 95] = [
    349, 457, 521, 838, 696, 1002, 873, 307, 458, 458, 523, 838, 380, 416, 380, 366, 696, 696, 696, 696, 696,
    696, 696, 696, 696, 696, 400, 400, 838, 838, 838, 611, 1000, 774, 763, 734, 831, 684, 684, 821, 837, 373,
    557, 775, 638, 996, 837, 851, 733, 851, 771, 721, 683, 813, 774, 1104, 771, 725, 726, 458, 366, 458, 838,
    557, 500, 675, 716, 593, 716, 679, 436, 716, 712, 343, 343, 666, 343, 1042, 712, 688, 716, 716, 494, 596,
    479, 712, 652, 924, 646, 652, 583, 712, 366, 712, 838,
];

const LATIN: [u16; 96] = [
    318, 401, 637, 637, 637, 637, 337, 557, 500, 1000, 472, 612, 838, 361, 1000, 553, 500, 838, 401, 401,
    500, 637, 637, 318, 500, 401, 472, 612, 970, 970, 970, 611, 685, 685, 685, 685, 685, 685, 1000, 723, 667,
    667, 667, 667, 295, 295, 295, 295, 775, 749, 788, 788, 788, 788, 788, 838, 788, 732, 732, 732, 732, 667,
    667, 630, 613, 613, 613, 613, 613, 613, 982, 550, 616, 616, 616, 616, 278, 278, 278, 278, 612, 634, 612,
    612, 612, 612, 612, 838, 612, 634, 634, 634, 634, 592, 635, 592,
];

const LATIN_BOLD: [u16; 96] = [
    349, 457, 696, 696, 637, 696, 366, 557, 500, 1000, 564, 646, 838, 416, 1000, 553, 500, 838, 438, 438,
    500, 736, 637, 380, 500, 438, 564, 646, 1036, 1036, 1036, 611, 774, 774, 774, 774, 774, 774, 1085, 734,
    684, 684, 684, 684, 373, 373, 373, 373, 838, 837, 851, 851, 851, 851, 851, 838, 851, 813, 813, 813, 813,
    725, 738, 720, 675, 675, 675, 675, 675, 675, 1048, 593, 679, 679, 679, 679, 343, 343, 343, 343, 688, 712,
    688, 688, 688, 688, 688, 838, 688, 712, 712, 712, 712, 652, 716, 652,
];

const GREEK: [u16; 57] = [
    685, 687, 558, 685, 667, 686, 752, 788, 295, 667, 685, 863, 749, 650, 788, 752, 667, 1000, 632, 611, 667,
    798, 686, 836, 765, 295, 667, 660, 541, 634, 339, 579, 660, 639, 592, 612, 541, 544, 634, 612, 339, 590,
    592, 637, 559, 558, 612, 690, 635, 587, 634, 603, 579, 660, 578, 713, 838,
];

/// The upper bound of the width of `text` at font size `size`, in the unit of `size`.
pub fn width(text: &str, size: f64, bold: bool) -> f64 {
    let thousandths: u32 = text.chars().map(|c| u32::from(advance(c, bold))).sum();
    f64::from(thousandths) * size / 1000.0
}

fn advance(c: char, bold: bool) -> u16 {
    let code = c as usize;
    match code {
        0x20..=0x7e => (if bold { &ASCII_BOLD } else { &ASCII })[code - 0x20],
        0xa0..=0xff => (if bold { &LATIN_BOLD } else { &LATIN })[code - 0xa0],
        // Greek is never bold on a sheet; a tenth is more than bold adds.
        0x391..=0x3c9 => GREEK[code - 0x391] * if bold { 11 } else { 10 } / 10,
        0x202f | 0x2009 => 200,
        0x2018 | 0x2019 => 380,
        0x2013 => 557,
        0x2032 => 264,
        0x2033 => 447,
        0x2070..=0x2089 => 528,
        0x2212 | 0x2248 | 0x2260..=0x2265 => 838,
        0x300..=0x36f => 0,
        _ => 1000,
    }
}

/// `text`, or as much of its beginning as fits into `room` with an ellipsis.
pub fn fit(text: &str, size: f64, bold: bool, room: f64) -> String {
    if width(text, size, bold) <= room {
        return text.to_string();
    }
    let mut out = String::new();
    let mut used = width("…", size, bold);
    for c in text.chars() {
        used += f64::from(advance(c, bold)) * size / 1000.0;
        if used > room {
            break;
        }
        out.push(c);
    }
    out.truncate(out.trim_end().len());
    out.push('…');
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn cut_text_fits_and_says_so() {
        let cut = fit("a window that is much too wide", 12.5, true, 80.0);
        assert!(cut.ends_with('…') && width(&cut, 12.5, true) <= 80.0, "{cut}");
        assert_eq!(fit("short", 12.5, false, 80.0), "short");
    }

    #[test]
    fn a_figure_is_as_wide_as_any_other_figure() {
        // Tabular numerals: columns line up only where all ten have one advance.
        assert!(('0'..='9').all(|digit| advance(digit, false) == advance('0', false)));
        assert!(('0'..='9').all(|digit| advance(digit, true) == advance('0', true)));
    }
}
