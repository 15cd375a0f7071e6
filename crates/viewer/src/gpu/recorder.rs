use super::{Shown, camera, clear_colour, plugin, target};
use crate::driver::{NoWindow, find_driver};
use bedswell_film::{RenderError, Renderer};
use bedswell_painter::{Camera, Colour, Drawing, Image, Size};
use bevy::app::PluginsState;
use bevy::prelude::{
    App, AssetPlugin, Assets, DefaultPlugins, Entity, Handle, On, PluginGroup, Resource, default,
};
use bevy::render::RenderPlugin;
use bevy::render::pipelined_rendering::PipelinedRenderingPlugin;
use bevy::render::view::screenshot::{Screenshot, ScreenshotCaptured};
use bevy::window::{ExitCondition, WindowPlugin};
use bevy::winit::WinitPlugin;
use std::sync::Arc;

/// Pixels of the target across one pixel of the picture.
pub(crate) const FINENESS: u32 = 2;

/// Updates after which a picture must have come back.
const PATIENCE: usize = 1000;

/// Bevy without a window: draws pictures on whatever driver there is.
pub struct Recorder {
    app: App,
    target: Option<(Entity, Handle<bevy::image::Image>, Size)>,
}

/// The picture that came back.
#[derive(Resource, Default)]
struct Caught(Option<bevy::image::Image>);

impl Recorder {
    /// Starts Bevy.
    ///
    /// # Errors
    /// [`NoWindow::Driver`] where nothing can draw.
    pub fn new() -> Result<Self, NoWindow> {
        find_driver()?;
        let mut app = App::new();
        app.add_plugins(
            DefaultPlugins
                .set(WindowPlugin {
                    primary_window: None,
                    exit_condition: ExitCondition::DontExit,
                    ..default()
                })
                .set(RenderPlugin { synchronous_pipeline_compilation: true, ..default() })
                .set(AssetPlugin { watch_for_changes_override: Some(false), ..default() })
                .disable::<bevy::log::LogPlugin>()
                .disable::<WinitPlugin>()
                .disable::<PipelinedRenderingPlugin>(),
        )
        .init_resource::<Caught>();
        plugin(&mut app);
        while app.plugins_state() == PluginsState::Adding {
            bevy::tasks::tick_global_task_pools_on_main_thread();
        }
        app.finish();
        app.cleanup();
        Ok(Self { app, target: None })
    }

    /// Draws one picture, every pixel averaged from four.
    ///
    /// # Errors
    /// [`NoWindow::NoPicture`] if the driver gives none back.
    pub fn draw(&mut self, drawing: Arc<Drawing>, view: &Camera) -> Result<Image, NoWindow> {
        let texture = self.aim(view.size, drawing.background);
        let fine = enlarged(view);
        self.app.insert_resource(Shown { drawing, camera: fine, thinnest: FINENESS as f32 });
        // The first updates bring pipelines and drawing onto the device.
        for _ in 0..3 {
            self.app.update();
        }
        self.app.world_mut().spawn(Screenshot::image(texture)).observe(
            |caught: On<ScreenshotCaptured>, mut kept: bevy::prelude::ResMut<Caught>| {
                kept.0 = Some(caught.image.clone());
            },
        );
        for _ in 0..PATIENCE {
            self.app.update();
            if let Some(image) = self.app.world_mut().resource_mut::<Caught>().0.take() {
                return Ok(reduced(&image.data.unwrap_or_default(), view.size));
            }
        }
        Err(NoWindow::NoPicture)
    }

    /// The texture to draw a picture of a size into, with the camera before it.
    fn aim(&mut self, size: Size, background: Colour) -> Handle<bevy::image::Image> {
        if let Some((camera, texture, old)) = &self.target
            && *old == size
        {
            let mut entity = self.app.world_mut().entity_mut(*camera);
            if let Some(mut camera) = entity.get_mut::<bevy::camera::Camera>() {
                camera.clear_color = clear_colour(background);
            }
            return texture.clone();
        }
        let world = self.app.world_mut();
        if let Some((old, ..)) = self.target.take() {
            world.despawn(old);
        }
        let texture = world
            .resource_mut::<Assets<bevy::image::Image>>()
            .add(target(size.width * FINENESS, size.height * FINENESS));
        let entity = world.spawn(camera(texture.clone(), background)).id();
        self.target = Some((entity, texture.clone(), size));
        texture
    }
}

impl Renderer for Recorder {
    fn render(&mut self, drawing: &Drawing, camera: &Camera) -> Result<Image, RenderError> {
        self.draw(Arc::new(drawing.clone()), camera).map_err(|error| RenderError(error.to_string()))
    }
}

/// The same view with more pixels.
pub(crate) fn enlarged(view: &Camera) -> Camera {
    let Size { width, height } = view.size;
    Camera {
        focal: view.focal * FINENESS as f32,
        size: Size { width: width * FINENESS, height: height * FINENESS },
        ..*view
    }
}

/// Averages the pixels of a premultiplied picture in linear light and frees their colour of the opacity.
fn reduced(fine: &[u8], size: Size) -> Image {
    let linear: Vec<f32> =
        (0..=255u8).map(|byte| bevy::color::Srgba::gamma_function(f32::from(byte) / 255.0)).collect();
    let row = (size.width * FINENESS * 4) as usize;
    let mut pixels = Vec::with_capacity((size.width * size.height * 4) as usize);
    for y in 0..size.height as usize {
        for x in 0..size.width as usize {
            let mut sum = [0.0; 4];
            for sample in 0..(FINENESS * FINENESS) as usize {
                let (right, down) = (sample % FINENESS as usize, sample / FINENESS as usize);
                let at = (y * FINENESS as usize + down) * row + (x * FINENESS as usize + right) * 4;
                for channel in 0..3 {
                    sum[channel] += linear[usize::from(fine[at + channel])];
                }
                sum[3] += f32::from(fine[at + 3]) / 255.0;
            }
            for channel in 0..3 {
                let straight = if sum[3] > 0.0 { sum[channel] / sum[3] } else { 0.0 };
                pixels.push(byte(bevy::color::Srgba::gamma_function_inverse(straight)));
            }
            pixels.push(byte(sum[3] / (FINENESS * FINENESS) as f32));
        }
    }
    Image { size, pixels }
}

fn byte(part: f32) -> u8 {
    (255.0 * part).round() as u8
}
