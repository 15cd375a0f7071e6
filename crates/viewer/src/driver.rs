use bevy::tasks::block_on;
use std::path::PathBuf;

/// What can draw on this machine.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Driver {
    /// A graphics card.
    Gpu,
    /// A driver that computes on the processor.
    Cpu,
}

/// Why no window can be opened; each says what to install.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum NoWindow {
    /// Neither a Wayland nor an X display answers.
    #[error(
        "there is no display to open a window on; run it on a desktop, or install and start a virtual one: \
         apt-get install xvfb, then xvfb-run bedswell view …"
    )]
    Display,
    /// Nothing can draw.
    #[error(
        "there is no Vulkan driver; install one (it draws on the processor where there is no graphics card): \
         apt-get install libvulkan1 mesa-vulkan-drivers"
    )]
    Driver,
    /// The display refused, or its client libraries are missing.
    #[error(
        "the display lets no window be opened; on X these libraries must be there: \
         apt-get install libx11-6 libx11-xcb1 libxcursor1 libxi6 libxrandr2 libxkbcommon-x11-0"
    )]
    Refused,
    /// The driver takes pictures and gives none back.
    #[error("the Vulkan driver gives no picture back; bring it up to date, or draw with the painter")]
    NoPicture,
}

/// Finds the driver that Bevy will use, before Bevy starts: it panics without one.
pub fn find_driver() -> Result<Driver, NoWindow> {
    let backends = wgpu::Backends::from_env().unwrap_or(wgpu::Backends::all());
    let instance = wgpu::Instance::new(wgpu::InstanceDescriptor {
        backends,
        ..wgpu::InstanceDescriptor::new_without_display_handle()
    });
    let wanted = wgpu::RequestAdapterOptions {
        power_preference: wgpu::PowerPreference::HighPerformance,
        ..Default::default()
    };
    let adapter = block_on(instance.request_adapter(&wanted)).map_err(|_| NoWindow::Driver)?;
    Ok(match adapter.get_info().device_type {
        wgpu::DeviceType::Cpu => Driver::Cpu,
        _ => Driver::Gpu,
    })
}

/// Says whether a display answers.
#[cfg(all(unix, not(target_os = "macos")))]
pub(crate) fn find_display() -> Result<(), NoWindow> {
    let variable = |name| std::env::var(name).ok().filter(|value| !value.is_empty());
    let wayland = variable("WAYLAND_DISPLAY").is_some_and(|name| {
        let folder = variable("XDG_RUNTIME_DIR").map(PathBuf::from).unwrap_or_default();
        std::os::unix::net::UnixStream::connect(folder.join(name)).is_ok()
    });
    if wayland || variable("DISPLAY").is_some_and(|name| x_answers(&name)) {
        Ok(())
    } else {
        Err(NoWindow::Display)
    }
}

/// Elsewhere the desktop is always there.
#[cfg(not(all(unix, not(target_os = "macos"))))]
pub(crate) fn find_display() -> Result<(), NoWindow> {
    Ok(())
}

/// Whether the X display of this name (`host:number.screen`) answers.
#[cfg(all(unix, not(target_os = "macos")))]
fn x_answers(name: &str) -> bool {
    use std::net::TcpStream;
    use std::os::linux::net::SocketAddrExt;
    use std::os::unix::net::{SocketAddr, UnixStream};
    let Some((host, rest)) = name.rsplit_once(':') else { return false };
    let Some(number) = rest.split('.').next().and_then(|n| n.parse::<u16>().ok()) else {
        return false;
    };
    if host.is_empty() || host == "unix" || host.contains('/') {
        let path = format!("/tmp/.X11-unix/X{number}");
        UnixStream::connect(&path).is_ok()
            || SocketAddr::from_abstract_name(&path)
                .is_ok_and(|address| UnixStream::connect_addr(&address).is_ok())
    } else {
        TcpStream::connect((host, 6000 + number)).is_ok()
    }
}
