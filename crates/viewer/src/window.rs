use crate::args::DrawnBy;
use crate::driver::{Driver, NoWindow};
use crate::gpu;
use crate::pane::{Easel, Panels};
use crate::picture_file::keep;
use crate::viewer::Viewer;
use bedswell_painter::Size;
use bevy::asset::RenderAssetUsages;
use bevy::camera::CameraMainTextureUsages;
use bevy::core_pipeline::tonemapping::{DebandDither, Tonemapping};
use bevy::image::ImageSampler;
use bevy::log::LogPlugin;
use bevy::prelude::*;
use bevy::render::RenderPlugin;
use bevy::render::render_resource::{Extent3d, TextureDimension, TextureFormat, TextureUsages};
use bevy::render::view::screenshot::{Screenshot, ScreenshotCaptured};
use bevy::window::{PresentMode, PrimaryWindow, WindowResolution};
use bevy::winit::{UpdateMode, WinitSettings};
use bevy_egui::egui::{Event, Modifiers, TextureId};
use bevy_egui::{
    EguiContext, EguiContexts, EguiGlobalSettings, EguiInput, EguiPlugin, EguiPostUpdateSet,
    EguiPreUpdateSet, EguiPrimaryContextPass, EguiRenderOutput, EguiTextureHandle, EguiUserTextures,
    PrimaryEguiContext,
};
use std::num::NonZero;
use std::panic::{AssertUnwindSafe, catch_unwind};
use std::path::PathBuf;
use std::time::Duration;

/// Opens the window and stays until it is closed.
///
/// # Errors
/// [`NoWindow::Refused`] if the display does not let a window be opened.
pub(crate) fn open(
    viewer: Viewer,
    size: Size,
    drawn_by: DrawnBy,
    driver: Driver,
) -> Result<AppExit, NoWindow> {
    let bevy_draws = match drawn_by {
        DrawnBy::Auto => driver == Driver::Gpu,
        DrawnBy::Painter => false,
        DrawnBy::Bevy => true,
    };
    let mut app = start(size, driver, viewer.title())?;
    // One call with many textures is faster on a graphics card, and slower elsewhere.
    let bindless_mode_array_size = if driver == Driver::Gpu { NonZero::new(16) } else { None };
    app.add_plugins(EguiPlugin { bindless_mode_array_size })
        .insert_resource(WinitSettings {
            focused_mode: UpdateMode::reactive_low_power(Duration::from_secs(60)),
            unfocused_mode: UpdateMode::reactive_low_power(Duration::from_secs(60)),
        })
        .insert_resource(viewer)
        .init_resource::<Picture>()
        .add_systems(Startup, set_up)
        .add_systems(
            PreUpdate,
            rest.after(EguiPreUpdateSet::ProcessInput).before(EguiPreUpdateSet::BeginPass),
        )
        .add_systems(EguiPrimaryContextPass, look);
    if bevy_draws {
        gpu::plugin(&mut app);
        app.add_systems(Startup, aim.after(set_up))
            .add_systems(PostUpdate, show_bevy.after(EguiPostUpdateSet::EndPass));
    } else {
        gpu::inset_plugin(&mut app);
        app.add_systems(
            PostUpdate,
            show_painter.after(EguiPostUpdateSet::ProcessOutput).before(EguiPostUpdateSet::PostProcessOutput),
        );
    }
    Ok(app.run())
}

/// Starts Bevy; what it panics with where the display refuses becomes an error.
fn start(size: Size, driver: Driver, title: String) -> Result<App, NoWindow> {
    let window = Window {
        title,
        name: Some("bedswell".to_owned()),
        resolution: WindowResolution::new(size.width, size.height),
        present_mode: match driver {
            Driver::Cpu => PresentMode::AutoNoVsync,
            Driver::Gpu => PresentMode::AutoVsync,
        },
        ..default()
    };
    let plugins = DefaultPlugins
        .set(WindowPlugin { primary_window: Some(window), ..default() })
        // A window that rests would not show what is compiled later.
        .set(RenderPlugin { synchronous_pipeline_compilation: true, ..default() })
        .set(LogPlugin { filter: "error".to_owned(), ..default() });
    let hook = std::panic::take_hook();
    std::panic::set_hook(Box::new(|_| {}));
    let app = catch_unwind(AssertUnwindSafe(move || {
        let mut app = App::new();
        app.add_plugins(plugins);
        app
    }));
    std::panic::set_hook(hook);
    app.map_err(|_| NoWindow::Refused)
}

/// How long the window waits for the painter before it shows the picture before.
const PATIENCE: Duration = Duration::from_millis(100);

/// The texture that the pane shows.
#[derive(Resource, Default)]
struct Picture {
    handle: Handle<Image>,
    id: Option<TextureId>,
    /// Whether anything has been drawn into it.
    ready: bool,
}

/// The painter's thread.
#[derive(Resource)]
struct PaintedBy(Easel);

/// The camera of the panels, the texture of the pane.
fn set_up(
    mut commands: Commands,
    mut images: ResMut<Assets<Image>>,
    mut textures: ResMut<EguiUserTextures>,
    mut picture: ResMut<Picture>,
    mut panels: ResMut<EguiGlobalSettings>,
) {
    // Panels belong to the window's camera, not to the bed's.
    panels.auto_create_primary_context = false;
    let usages = CameraMainTextureUsages::default().with(TextureUsages::COPY_DST);
    // Panels that are spared stay from the frame before.
    let camera = Camera { clear_color: ClearColorConfig::None, ..default() };
    commands.spawn((
        PrimaryEguiContext,
        Camera2d,
        camera,
        Tonemapping::None,
        DebandDither::Disabled,
        Msaa::Off,
        usages,
    ));
    picture.handle = images.add(gpu::target(1, 1));
    picture.id = Some(textures.add_image(EguiTextureHandle::Strong(picture.handle.clone())));
}

/// Lets the window rest: bevy_egui tells egui the modifier keys anew in every frame, and
/// egui asks for another frame after any event.
fn rest(mut inputs: Query<&mut EguiInput>, mut known: Local<Option<Modifiers>>) {
    for mut input in &mut inputs {
        input.events.retain(|event| match event {
            Event::ModifiersChanged(now) => known.replace(*now) != Some(*now),
            _ => true,
        });
    }
}

/// The whole window, once per frame.
fn look(
    mut contexts: EguiContexts,
    mut viewer: ResMut<Viewer>,
    picture: Res<Picture>,
    mut window: Single<&mut Window, With<PrimaryWindow>>,
    mut exit: MessageWriter<AppExit>,
    mut commands: Commands,
) -> Result {
    let context = contexts.ctx_mut()?;
    viewer.look(context, picture.id.filter(|_| picture.ready));
    if let Some(folder) = viewer.take_window_shot() {
        shoot(&mut commands, folder);
    }
    if window.title != viewer.title() {
        window.title = viewer.title();
    }
    if viewer.done() {
        exit.write(AppExit::Success);
    }
    Ok(())
}

/// Takes a picture of the window and writes it into a folder.
fn shoot(commands: &mut Commands, folder: PathBuf) {
    commands.spawn(Screenshot::primary_window()).observe(
        move |caught: On<ScreenshotCaptured>, mut viewer: ResMut<Viewer>| {
            let size = Size { width: caught.image.width(), height: caught.image.height() };
            let mut pixels = caught.image.data.clone().unwrap_or_default();
            if matches!(
                caught.image.texture_descriptor.format,
                TextureFormat::Bgra8UnormSrgb | TextureFormat::Bgra8Unorm
            ) {
                pixels.chunks_exact_mut(4).for_each(|pixel| pixel.swap(0, 2));
            }
            pixels.chunks_exact_mut(4).for_each(|pixel| pixel[3] = 255);
            let image = bedswell_painter::Image { size, pixels };
            viewer.tell(match keep(&folder, "window", &image) {
                Ok(path) => format!("picture written to {}", path.display()),
                Err(error) => format!("the picture cannot be written: {error}"),
            });
        },
    );
}

/// Asks the painter for what is to be seen and hangs its newest picture into the pane.
fn show_painter(
    mut viewer: ResMut<Viewer>,
    painted: Option<Res<PaintedBy>>,
    window: Single<(&mut EguiContext, &mut EguiRenderOutput)>,
    mut panels: Local<Panels>,
    picture: Res<Picture>,
    mut images: ResMut<Assets<Image>>,
    mut commands: Commands,
) {
    let (mut context, mut output) = window.into_inner();
    let Some(painted) = painted else {
        let context = context.get_mut().clone();
        commands.insert_resource(PaintedBy(Easel::new(move || context.request_repaint())));
        return;
    };
    let asked = viewer.take_view();
    panels.spare(&mut output, asked.is_some() && !viewer.covers_bed());
    // Panels and picture appear together unless the painter is slow.
    let painting = match asked {
        Some(view) => painted.0.show(view, PATIENCE),
        None => painted.0.take(),
    };
    let Some(painting) = painting else { return };
    let size =
        Extent3d { width: painting.size.width, height: painting.size.height, depth_or_array_layers: 1 };
    let (dimension, format) = (TextureDimension::D2, TextureFormat::Rgba8UnormSrgb);
    let mut image = Image::new(size, dimension, painting.pixels, format, RenderAssetUsages::RENDER_WORLD);
    image.texture_descriptor.usage |= TextureUsages::COPY_SRC;
    let _ = images.insert(picture.handle.id(), image);
    let [x, y] = viewer.corner();
    commands.insert_resource(gpu::Inset { image: picture.handle.clone(), corner: UVec2::new(x, y) });
    viewer.count_picture();
}

/// Bevy's camera on the bed.
fn aim(mut commands: Commands, picture: Res<Picture>, viewer: Res<Viewer>) {
    commands.spawn(gpu::camera(picture.handle.clone(), viewer.background()));
}

/// Lets Bevy draw what is to be seen, with four pixels of the texture to one of the screen.
fn show_bevy(
    mut viewer: ResMut<Viewer>,
    mut picture: ResMut<Picture>,
    mut images: ResMut<Assets<Image>>,
    mut camera: Single<&mut Camera, With<Camera3d>>,
    mut commands: Commands,
) {
    let Some(view) = viewer.take_view() else { return };
    let fine = gpu::enlarged(&bedswell_painter::Camera::new(&view.pose, view.size));
    let Size { width, height } = fine.size;
    if images.get(&picture.handle).is_none_or(|image| (image.width(), image.height()) != (width, height)) {
        let mut image = gpu::target(width, height);
        image.sampler = ImageSampler::linear();
        let _ = images.insert(picture.handle.id(), image);
    }
    camera.clear_color = gpu::clear_colour(view.drawing.background);
    commands.insert_resource(gpu::Shown {
        drawing: view.drawing,
        camera: fine,
        thinnest: gpu::FINENESS as f32,
    });
    picture.ready = true;
    viewer.count_picture();
}
