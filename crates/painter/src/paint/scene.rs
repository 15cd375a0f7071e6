use super::ball::Sphere;
use super::bins::{Bins, Bounds, Grid};
use super::mesh::{self, Facet, Surface};
use super::rod::{self, Glimpse, Strip};
use super::tile::Tile;
use super::view::{Seen, View};
use crate::{Camera, Drawing};
use rayon::prelude::*;

/// How many balls are painted between looks at whether the rest can be seen at all.
const LOOK: usize = 8;

/// A drawing as the camera sees it, sorted to the tiles of the picture.
pub(super) struct Scene<'a> {
    pub(super) view: View,
    pub(super) grid: Grid,
    pub(super) background: [u8; 4],
    cut: Option<(Seen, f64)>,
    balls: Sorted<Sphere>,
    drawing: &'a Drawing,
    rods: Sorted<Glimpse>,
    facets: Sorted<Facet>,
    surfaces: Vec<Surface<'a>>,
    veils: Sorted<Veil>,
}

/// Things and the tiles that they touch.
struct Sorted<T> {
    things: Vec<T>,
    bins: Bins,
}

impl<T> Sorted<T> {
    fn new(grid: &Grid, things: Vec<T>, bounds: impl Fn(&T) -> Bounds) -> Self {
        Self { bins: Bins::new(grid, &things, bounds), things }
    }

    fn at(&self, place: usize) -> impl Iterator<Item = &T> {
        self.bins.at(place).map(|number| &self.things[number])
    }
}

/// Something that lets light through.
enum Veil {
    Ball(Sphere),
    Rod(Strip),
    Facet(Facet),
}

impl<'a> Scene<'a> {
    pub(super) fn new(drawing: &'a Drawing, camera: &Camera, samples: usize) -> Self {
        let view = View::new(camera, samples);
        let size = camera.size;
        let grid = Grid::new(size.width as usize * samples, size.height as usize * samples);
        let cut = drawing.cut.as_ref().and_then(|plane| view.plane(plane));

        let balls = |opaque: bool| -> Vec<Sphere> {
            let of_kind = drawing.balls.par_iter().filter(|ball| (ball.colour.a == 255) == opaque);
            of_kind.filter_map(|ball| Sphere::new(&view, cut.as_ref(), ball)).collect()
        };
        let rods = drawing.rods.par_iter().map(|rod| Glimpse::new(&view, cut.as_ref(), rod)).collect();
        let clear_rods = drawing.rods.iter().filter(|rod| !rod::is_opaque(rod));
        let clear_rods = clear_rods.filter_map(|rod| Strip::new(&view, cut.as_ref(), rod));
        let mut solid_balls = balls(true);
        solid_balls.par_sort_by(|a, b| a.nearest.total_cmp(&b.nearest));
        let surfaces: Vec<_> = drawing.meshes.iter().map(|mesh| Surface::new(&view, mesh)).collect();

        let mut veils: Vec<(f64, Veil)> = Vec::new();
        veils.extend(balls(false).into_iter().map(|ball| (ball.centre.z, Veil::Ball(ball))));
        veils.extend(clear_rods.map(|rod| (rod.depth(), Veil::Rod(rod))));
        let mut facets = Vec::new();
        for (number, surface) in surfaces.iter().enumerate() {
            let of_surface = mesh::facets(&view, number, surface);
            if surface.is_opaque() {
                facets.extend(of_surface);
            } else {
                let depth = surface.depth();
                veils.extend(mesh::from_behind(of_surface).map(|facet| (depth, Veil::Facet(facet))));
            }
        }
        veils.sort_by(|a, b| b.0.total_cmp(&a.0));
        let veils = veils.into_iter().map(|(_, veil)| veil).collect();

        Self {
            background: drawing.background.bytes(),
            balls: Sorted::new(&grid, solid_balls, |ball| ball.bounds),
            rods: Sorted::new(&grid, rods, |rod| rod.bounds),
            facets: Sorted::new(&grid, facets, |facet| facet.bounds),
            veils: Sorted::new(&grid, veils, |veil| match veil {
                Veil::Ball(ball) => ball.bounds,
                Veil::Rod(rod) => rod.bounds,
                Veil::Facet(facet) => facet.bounds,
            }),
            surfaces,
            drawing,
            cut,
            grid,
            view,
        }
    }

    /// Paints what hides other things.
    #[inline(always)]
    pub(super) fn paint_opaque(&self, tile: &mut Tile, place: usize) {
        let mut farthest = f32::INFINITY;
        for (number, ball) in self.balls.at(place).enumerate() {
            if number % LOOK == LOOK - 1 {
                farthest = tile.farthest();
            }
            if ball.nearest > farthest {
                break;
            }
            ball.paint(&self.view, self.cut.as_ref(), tile);
        }
        for facet in self.facets.at(place) {
            let surface = &self.surfaces[facet.surface];
            facet.scan(&self.view, self.cut.as_ref(), surface, tile, Tile::put);
        }
        self.paint_rods(tile, place);
    }

    /// Paints rods from the nearest to the farthest, so that each sample is seldom painted twice.
    #[inline(always)]
    fn paint_rods(&self, tile: &mut Tile, place: usize) {
        let mut farthest = tile.farthest();
        let mut order: Vec<u64> = self
            .rods
            .bins
            .at(place)
            .map(|number| (self.rods.things[number].nearest, number))
            .filter(|(nearest, _)| *nearest <= farthest)
            .map(|(nearest, number)| u64::from(nearest.to_bits()) << 32 | number as u64)
            .collect();
        order.sort_unstable();
        for (count, key) in order.into_iter().enumerate() {
            if count % (8 * LOOK) == 8 * LOOK - 1 {
                farthest = tile.farthest();
            }
            if f32::from_bits((key >> 32) as u32) > farthest {
                break;
            }
            let rod = &self.drawing.rods[key as u32 as usize];
            if let Some(strip) = Strip::new(&self.view, self.cut.as_ref(), rod) {
                strip.scan(tile, Tile::put);
            }
        }
    }

    /// Lays what lets light through over the rest, from back to front.
    #[inline(always)]
    pub(super) fn paint_veils(&self, tile: &mut Tile, place: usize) {
        for (number, veil) in self.veils.at(place).enumerate() {
            if number == 0 {
                tile.start_veils();
            }
            match veil {
                Veil::Ball(ball) => ball.paint_ghost(&self.view, self.cut.as_ref(), tile),
                Veil::Rod(rod) => rod.scan(tile, Tile::veil),
                Veil::Facet(facet) => {
                    let surface = &self.surfaces[facet.surface];
                    facet.scan(&self.view, self.cut.as_ref(), surface, tile, Tile::veil);
                }
            }
        }
    }
}
