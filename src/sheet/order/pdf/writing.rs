//! Pages as a document: both fonts embedded, streams deflated, no date, so that the same sheet is the
//! same bytes.

use super::Paper;
use super::drawing::Item;
use super::font::Face;
use super::layout::Page;
use crate::sheet::figure::Rgb;
use miniz_oxide::deflate::compress_to_vec_zlib;
use pdf_writer::types::{
    CidFontType, FontFlags, LineCapStyle, LineJoinStyle, SystemInfo, UnicodeCmap,
};
use pdf_writer::{Content, Filter, Finish as _, Name, Pdf, Rect, Ref, Str, TextStr};
use std::collections::{BTreeMap, BTreeSet};

/// How hard streams are deflated.
const LEVEL: u8 = 8;
/// Distance of the control points of a quarter of a circle (common practice).
const ROUND: f64 = 0.5523;
/// How fonts number their glyphs: as the files do.
const SYSTEM: SystemInfo<'static> = SystemInfo {
    registry: Str(b"Adobe"),
    ordering: Str(b"Identity"),
    supplement: 0,
};

/// Numbers of objects, given out one by one.
struct Numbers(i32);

impl Numbers {
    fn next(&mut self) -> Ref {
        self.0 += 1;
        Ref::new(self.0)
    }
}

/// The document.
pub(super) fn document(pages: &[Page], paper: Paper, title: &str, program: &str) -> Vec<u8> {
    let mut numbers = Numbers(0);
    let mut pdf = Pdf::new();
    let (catalog, tree, info) = (numbers.next(), numbers.next(), numbers.next());
    let fonts = Face::ALL.map(|face| (face, numbers.next()));
    let opacities = opacities(pages);
    let states: Vec<(u32, Ref)> = opacities.iter().map(|&it| (it, numbers.next())).collect();
    let leaves: Vec<(Ref, Ref)> = pages
        .iter()
        .map(|_| (numbers.next(), numbers.next()))
        .collect();

    let mut root = pdf.catalog(catalog);
    root.pages(tree).lang(TextStr("en"));
    root.viewer_preferences().display_doc_title(true);
    root.finish();
    pdf.document_info(info)
        .title(TextStr(title))
        .producer(TextStr(program));
    pdf.pages(tree)
        .kids(leaves.iter().map(|(page, _)| *page))
        .count(i32::try_from(pages.len()).unwrap_or(i32::MAX));
    let (width, height) = paper.size_pt();
    for (page, (leaf, stream)) in pages.iter().zip(&leaves) {
        let mut node = pdf.page(*leaf);
        node.parent(tree)
            .media_box(Rect::new(0.0, 0.0, width as f32, height as f32))
            .contents(*stream);
        let mut resources = node.resources();
        let mut by_name = resources.fonts();
        for (face, font) in &fonts {
            by_name.pair(font_name(*face), *font);
        }
        by_name.finish();
        let mut by_name = resources.ext_g_states();
        for (opacity, state) in &states {
            by_name.pair(Name(state_name(*opacity).as_bytes()), *state);
        }
        by_name.finish();
        resources.finish();
        node.finish();
        let drawn = compress_to_vec_zlib(&drawing(page, height), LEVEL);
        pdf.stream(*stream, &drawn).filter(Filter::FlateDecode);
    }
    for (opacity, state) in &states {
        let mut graphics = pdf.ext_graphics(*state);
        graphics.non_stroking_alpha(1e-3 * *opacity as f32);
    }
    let written = characters(pages);
    for (face, font) in fonts {
        embed(face, font, &written, &mut numbers, &mut pdf);
    }
    pdf.finish()
}

fn font_name(face: Face) -> Name<'static> {
    match face {
        Face::Regular => Name(b"R"),
        Face::Bold => Name(b"B"),
    }
}

fn permille(opacity: f64) -> u32 {
    (1e3 * opacity.clamp(0.0, 1.0)).round() as u32
}

fn state_name(opacity: u32) -> String {
    format!("A{opacity}")
}

/// Every opacity that areas have, thousandths.
fn opacities(pages: &[Page]) -> BTreeSet<u32> {
    let items = pages.iter().flat_map(|page| &page.items);
    let of_fills = items.filter_map(|item| match item {
        Item::Fill { opacity, .. } => Some(permille(*opacity)),
        _ => None,
    });
    of_fills.chain([1000]).collect()
}

/// The characters behind the glyphs in use, by font.
fn characters(pages: &[Page]) -> BTreeMap<Face, BTreeMap<u16, char>> {
    let mut written: BTreeMap<Face, BTreeMap<u16, char>> = BTreeMap::new();
    for item in pages.iter().flat_map(|page| &page.items) {
        if let Item::Text { text, face, .. } = item {
            let of_face = written.entry(*face).or_default();
            for character in text.chars() {
                let font = face.font();
                let shown = if font.has(character) {
                    character
                } else {
                    super::font::STRANGER
                };
                of_face.insert(font.glyph(shown), shown);
            }
        }
    }
    written
}

/// What a page consists of, in the language of PDF.
fn drawing(page: &Page, height: f64) -> Vec<u8> {
    let mut content = Content::new();
    content
        .set_line_join(LineJoinStyle::RoundJoin)
        .set_line_cap(LineCapStyle::ButtCap);
    let up = |(x, y): (f64, f64)| (x as f32, (height - y) as f32);
    let mut opacity_now = 1000;
    for item in &page.items {
        match item {
            Item::Text {
                at,
                text,
                face,
                size_pt,
                rgb,
                upright,
            } => {
                let font = face.font();
                let glyphs: Vec<u8> = text
                    .chars()
                    .flat_map(|it| font.glyph(it).to_be_bytes())
                    .collect();
                fill_rgb(&mut content, *rgb);
                set_opacity(&mut content, 1000, &mut opacity_now);
                let (x, y) = up(*at);
                let matrix = if *upright {
                    [0.0, 1.0, -1.0, 0.0, x, y]
                } else {
                    [1.0, 0.0, 0.0, 1.0, x, y]
                };
                content
                    .begin_text()
                    .set_font(font_name(*face), *size_pt as f32)
                    .set_text_matrix(matrix)
                    .show(Str(&glyphs))
                    .end_text();
            }
            Item::Line {
                points,
                width_pt,
                rgb,
                dash_pt,
                is_closed,
            } => {
                let [r, g, b] = shares(*rgb);
                content
                    .set_stroke_rgb(r, g, b)
                    .set_line_width(*width_pt as f32)
                    .set_dash_pattern(dash_pt.iter().map(|&it| it as f32), 0.0);
                way(&mut content, points, up);
                if *is_closed {
                    content.close_and_stroke();
                } else {
                    content.stroke();
                }
            }
            Item::Fill {
                points,
                rgb,
                opacity,
            } => {
                fill_rgb(&mut content, *rgb);
                set_opacity(&mut content, permille(*opacity), &mut opacity_now);
                way(&mut content, points, up);
                content.close_path().fill_nonzero();
            }
            Item::Disc {
                at,
                radius_pt,
                rgb,
                is_ring,
            } => {
                set_opacity(&mut content, 1000, &mut opacity_now);
                let radius_pt = if *is_ring {
                    0.85 * radius_pt
                } else {
                    *radius_pt
                };
                circle(&mut content, up(*at), radius_pt as f32);
                if *is_ring {
                    let [r, g, b] = shares(*rgb);
                    content
                        .set_fill_rgb(1.0, 1.0, 1.0)
                        .set_stroke_rgb(r, g, b)
                        .set_line_width((0.3 * radius_pt) as f32)
                        .set_dash_pattern([], 0.0)
                        .fill_nonzero_and_stroke();
                } else {
                    fill_rgb(&mut content, *rgb);
                    content.fill_nonzero();
                }
            }
        }
    }
    content.finish().into_vec()
}

fn shares(rgb: Rgb) -> [f32; 3] {
    rgb.map(|it| f32::from(it) / 255.0)
}

fn fill_rgb(content: &mut Content, rgb: Rgb) {
    let [r, g, b] = shares(rgb);
    content.set_fill_rgb(r, g, b);
}

fn set_opacity(content: &mut Content, wanted: u32, now: &mut u32) {
    if wanted != *now {
        content.set_parameters(Name(state_name(wanted).as_bytes()));
        *now = wanted;
    }
}

fn way(content: &mut Content, points: &[(f64, f64)], up: impl Fn((f64, f64)) -> (f32, f32)) {
    for (place, &point) in points.iter().enumerate() {
        let (x, y) = up(point);
        if place == 0 {
            content.move_to(x, y);
        } else {
            content.line_to(x, y);
        }
    }
}

fn circle(content: &mut Content, (x, y): (f32, f32), radius: f32) {
    let control = ROUND as f32 * radius;
    content.move_to(x + radius, y);
    for [[a, b], [c, d], [e, f]] in [
        [[radius, control], [control, radius], [0.0, radius]],
        [[-control, radius], [-radius, control], [-radius, 0.0]],
        [[-radius, -control], [-control, -radius], [0.0, -radius]],
        [[control, -radius], [radius, -control], [radius, 0.0]],
    ] {
        content.cubic_to(x + a, y + b, x + c, y + d, x + e, y + f);
    }
    content.close_path();
}

/// Writes a font with the widths of its glyphs and the characters behind those in use.
fn embed(
    face: Face,
    whole: Ref,
    written: &BTreeMap<Face, BTreeMap<u16, char>>,
    numbers: &mut Numbers,
    pdf: &mut Pdf,
) {
    let font = face.font();
    let name = Name(font.name.as_bytes());
    let [descendant, descriptor, file, meanings] = std::array::from_fn(|_| numbers.next());
    pdf.type0_font(whole)
        .base_font(name)
        .encoding_predefined(Name(b"Identity-H"))
        .descendant_font(descendant)
        .to_unicode(meanings);
    let mut described = pdf.cid_font(descendant);
    described
        .subtype(CidFontType::Type2)
        .base_font(name)
        .system_info(SYSTEM)
        .font_descriptor(descriptor)
        .cid_to_gid_map_predefined(Name(b"Identity"));
    described.widths().consecutive(
        0,
        (0..font.glyphs()).map(|glyph| (1e3 * font.advance_em(glyph)) as f32),
    );
    described.finish();
    let [left, bottom, right, top] = font.bounds();
    let [ascent, descent, capitals] = font.heights();
    pdf.font_descriptor(descriptor)
        .name(name)
        .flags(FontFlags::NON_SYMBOLIC)
        .bbox(Rect::new(left, bottom, right, top))
        .italic_angle(0.0)
        .ascent(ascent)
        .descent(descent)
        .cap_height(capitals)
        .stem_v(if face == Face::Bold { 140.0 } else { 80.0 })
        .font_file2(file);
    let bytes = compress_to_vec_zlib(font.bytes, LEVEL);
    let mut stream = pdf.stream(file, &bytes);
    stream.filter(Filter::FlateDecode);
    stream.pair(
        Name(b"Length1"),
        i32::try_from(font.bytes.len()).unwrap_or(i32::MAX),
    );
    stream.finish();
    let mut map = UnicodeCmap::new(Name(b"Meanings"), SYSTEM);
    for (glyph, character) in written.get(&face).into_iter().flatten() {
        map.pair(*glyph, *character);
    }
    pdf.cmap(meanings, &map.finish());
}
