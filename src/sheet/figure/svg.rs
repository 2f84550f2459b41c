//! A scene as a self-contained SVG document: no script, no font, no reference to anything outside,
//! and no identifiers, so that several figures can stand in one page.

use std::fmt::Write as _;

use super::glyphs::{Level, SCRIPT_SIZE, Weight, is_known, set, width_px};
use super::palette::{Mark, Rgb, WHITE};
use super::scene::{Anchor, Point, Rectangle, Scene, Shape, Stroke, Text};

/// The document: `title` and `description` are for readers who do not see it.
pub(crate) fn document(scene: &Scene, title: &str, description: &str) -> String {
    let (width, height) = (number(scene.width_px), number(scene.height_px));
    let mut svg = format!(
        "<svg xmlns=\"http://www.w3.org/2000/svg\" width=\"{width}\" height=\"{height}\" \
         viewBox=\"0 0 {width} {height}\" role=\"img\" font-family=\"sans-serif\">\n\
         <title>{}</title>\n<desc>{}</desc>\n",
        escaped(title),
        escaped(description),
    );
    let page = Rectangle {
        right_px: scene.width_px,
        bottom_px: scene.height_px,
        ..Rectangle::default()
    };
    element(&mut svg, &Shape::rectangle(page, WHITE, 1.0));
    for shape in &scene.shapes {
        element(&mut svg, shape);
    }
    svg.push_str("</svg>\n");
    svg
}

fn element(svg: &mut String, shape: &Shape) {
    match shape {
        Shape::Line { points, stroke } => line(svg, points, stroke),
        Shape::Fill {
            points,
            rgb,
            opacity,
        } => {
            let opacity = if *opacity < 1.0 {
                format!(" fill-opacity=\"{}\"", number(*opacity))
            } else {
                String::new()
            };
            append(
                svg,
                format_args!(
                    "<path d=\"{}Z\" fill=\"{}\"{opacity}/>\n",
                    path(points),
                    hex(*rgb)
                ),
            );
        }
        Shape::Mark {
            at,
            mark,
            size_px,
            rgb,
        } => self::mark(svg, *at, *mark, *size_px, *rgb),
        Shape::Text(text) => self::text(svg, text),
    }
}

/// Adds to the document; writing to a string cannot fail.
fn append(svg: &mut String, arguments: std::fmt::Arguments<'_>) {
    svg.write_fmt(arguments).expect("a string takes any text");
}

fn line(svg: &mut String, points: &[Point], stroke: &Stroke) {
    let lengths: Vec<String> = stroke
        .dash
        .lengths_px(stroke.width_px)
        .into_iter()
        .map(number)
        .collect();
    let dashes = if lengths.is_empty() {
        String::new()
    } else {
        format!(" stroke-dasharray=\"{}\"", lengths.join(" "))
    };
    append(
        svg,
        format_args!(
            "<path d=\"{}\" fill=\"none\" stroke=\"{}\" stroke-width=\"{}\" \
             stroke-linejoin=\"round\"{dashes}/>\n",
            path(points),
            hex(stroke.rgb),
            number(stroke.width_px),
        ),
    );
}

/// The way from point to point; a point that prints like the one before it is left out.
fn path(points: &[Point]) -> String {
    let mut path = String::new();
    let mut last = String::new();
    for (x, y) in points {
        let here = format!("{} {}", number(*x), number(*y));
        if here != last {
            path.push(if path.is_empty() { 'M' } else { 'L' });
            path.push_str(&here);
            last = here;
        }
    }
    path
}

fn mark(svg: &mut String, (x, y): Point, mark: Mark, size_px: f64, rgb: Rgb) {
    let half = 0.5 * size_px;
    let corners = |points: &[Point]| {
        let moved: Vec<Point> = points
            .iter()
            .map(|(a, b)| (x + a * half, y + b * half))
            .collect();
        path(&moved)
    };
    let colour = hex(rgb);
    let (x, y) = (number(x), number(y));
    match mark {
        Mark::Disc => append(
            svg,
            format_args!(
                "<circle cx=\"{x}\" cy=\"{y}\" r=\"{}\" fill=\"{colour}\"/>\n",
                number(half)
            ),
        ),
        Mark::Ring => append(
            svg,
            format_args!(
                "<circle cx=\"{x}\" cy=\"{y}\" r=\"{}\" fill=\"{}\" stroke=\"{colour}\" \
                 stroke-width=\"1.5\"/>\n",
                number((half - 0.75).max(0.5)),
                hex(WHITE),
            ),
        ),
        Mark::Square | Mark::Diamond | Mark::Triangle => {
            let outline = match mark {
                Mark::Square => corners(&[(-0.9, -0.9), (0.9, -0.9), (0.9, 0.9), (-0.9, 0.9)]),
                Mark::Diamond => corners(&[(0.0, -1.2), (1.2, 0.0), (0.0, 1.2), (-1.2, 0.0)]),
                _ => corners(&[(0.0, -1.1), (1.1, 0.9), (-1.1, 0.9)]),
            };
            append(
                svg,
                format_args!("<path d=\"{outline}Z\" fill=\"{colour}\"/>\n"),
            );
        }
    }
}

/// How far a character is lifted above its line, in parts of the font size; negative: dropped.
pub(crate) fn lift(level: Level) -> f64 {
    match level {
        Level::Line => 0.0,
        Level::Raised => 0.36,
        Level::Lowered => -0.16,
    }
}

fn text(svg: &mut String, text: &Text) {
    let (x, y) = (number(text.at.0), number(text.at.1));
    append(
        svg,
        format_args!(
            "<text x=\"{x}\" y=\"{y}\" font-size=\"{}\"",
            number(text.size_px)
        ),
    );
    match text.anchor {
        Anchor::Start => {}
        Anchor::Middle => svg.push_str(" text-anchor=\"middle\""),
        Anchor::End => svg.push_str(" text-anchor=\"end\""),
    }
    if text.weight == Weight::Bold {
        svg.push_str(" font-weight=\"bold\"");
    }
    if text.upright {
        append(svg, format_args!(" transform=\"rotate(-90 {x} {y})\""));
    }
    append(svg, format_args!(" fill=\"{}\">", hex(text.rgb)));
    runs(svg, &text.content, text.size_px, text.weight);
    svg.push_str("</text>\n");
}

/// The content with raised and lowered characters in runs of their own, and so those whose glyphs
/// are not in the table: nobody knows how wide the reader's font makes them, so they are forced to
/// the width measured.
fn runs(svg: &mut String, content: &str, size_px: f64, weight: Weight) {
    let drop_px = |level: Level| -lift(level) * size_px;
    let characters = content.chars().map(|character| {
        let (level, plain) = set(character);
        ((level, is_known(plain)), plain)
    });
    let mut characters = characters.peekable();
    let mut height_px = 0.0;
    while let Some((kind, first)) = characters.next() {
        let mut run = first.to_string();
        while let Some((_, next)) = characters.next_if(|(next, _)| *next == kind) {
            run.push(next);
        }
        let (level, known) = kind;
        let mut attributes = String::new();
        let shift_px = drop_px(level) - height_px;
        height_px = drop_px(level);
        if shift_px != 0.0 {
            append(
                &mut attributes,
                format_args!(" dy=\"{}\"", number(shift_px)),
            );
        }
        if level != Level::Line {
            let size_px = SCRIPT_SIZE * size_px;
            append(
                &mut attributes,
                format_args!(" font-size=\"{}\"", number(size_px)),
            );
        }
        if !known {
            let forced_px = width_px(&run, size_px, weight);
            append(
                &mut attributes,
                format_args!(
                    " textLength=\"{}\" lengthAdjust=\"spacingAndGlyphs\"",
                    number(forced_px)
                ),
            );
        }
        let run = escaped(&run);
        if attributes.is_empty() {
            svg.push_str(&run);
        } else {
            append(svg, format_args!("<tspan{attributes}>{run}</tspan>"));
        }
    }
}

/// A number with at most two decimals, the same bytes on every machine.
fn number(value: f64) -> String {
    let written = format!("{value:.2}");
    let written = written.trim_end_matches('0').trim_end_matches('.');
    if written == "-0" {
        "0".to_owned()
    } else {
        written.to_owned()
    }
}

fn hex([red, green, blue]: Rgb) -> String {
    format!("#{red:02x}{green:02x}{blue:02x}")
}

/// A text that XML reads as itself.
fn escaped(text: &str) -> String {
    let mut escaped = String::with_capacity(text.len());
    for character in text.chars() {
        match character {
            '&' => escaped.push_str("&amp;"),
            '<' => escaped.push_str("&lt;"),
            '>' => escaped.push_str("&gt;"),
            '"' => escaped.push_str("&quot;"),
            '\'' => escaped.push_str("&#39;"),
            _ => escaped.push(character),
        }
    }
    escaped
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::sheet::figure::scene::Purpose;

    #[test]
    fn numbers_are_short_and_have_no_negative_zero() {
        assert_eq!(number(1.0), "1");
        assert_eq!(number(-0.001), "0");
        assert_eq!(number(12.345), "12.35");
        assert_eq!(number(100.0), "100");
    }

    #[test]
    fn raised_figures_return_to_the_line() {
        let mut svg = String::new();
        runs(&mut svg, "cm⁻³ <", 10.0, Weight::Regular);
        assert_eq!(
            svg,
            "cm<tspan dy=\"-3.6\" font-size=\"7\">−3</tspan><tspan dy=\"3.6\"> &lt;</tspan>"
        );
    }

    #[test]
    fn glyphs_of_unknown_width_are_forced() {
        let mut svg = String::new();
        runs(&mut svg, "d 井", 10.0, Weight::Regular);
        let forced = "<tspan textLength=\"12\" lengthAdjust=\"spacingAndGlyphs\">井</tspan>";
        assert_eq!(svg, format!("d {forced}"));
    }

    #[test]
    fn markup_in_a_text_stays_text() {
        let mut scene = Scene {
            width_px: 10.0,
            height_px: 10.0,
            ..Scene::default()
        };
        let hostile = "</text><script>alert('1')</script>&\"";
        scene.write(Text::new(
            hostile.to_owned(),
            Purpose::Note,
            (0.0, 0.0),
            10.0,
        ));
        let svg = document(&scene, hostile, hostile);
        assert!(!svg.contains("<script"));
        assert_eq!(svg.matches("&lt;script&gt;").count(), 3);
    }

    #[test]
    fn equal_points_are_drawn_once() {
        assert_eq!(path(&[(0.0, 0.0), (0.001, 0.0), (1.0, 2.5)]), "M0 0L1 2.5");
    }
}
