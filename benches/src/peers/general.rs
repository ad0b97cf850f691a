//! The same as five models of a general discrete-event engine (nexosim, MIT or Apache-2.0), in the form its examples show, on
//! one thread.

use crate::rhythm::{BLANKING, BLOCKED, ESCAPE, LINK, LOWER, NODE_BASE, REFRACTORY, SINUS, Tally};
use nexosim::Message;
use nexosim::model::{Context, Model, schedulable};
use nexosim::ports::{Output, QuerySource};
use nexosim::simulation::{EventKey, Mailbox, SimInit, SimulationError};
use nexosim::time::MonotonicTime;
use serde::{Deserialize, Serialize};
use std::time::Duration;

const fn us(micros: u64) -> Duration {
    Duration::from_micros(micros)
}

fn micros<M: Model>(cx: &Context<M>) -> u64 {
    cx.time().duration_since(MonotonicTime::EPOCH).as_micros() as u64
}

#[derive(Serialize, Deserialize)]
struct SinusNode {
    wave: Output<()>,
    blocked: u64,
}

#[Model]
impl SinusNode {
    #[nexosim(init)]
    async fn init(&mut self, cx: &Context<Self>) {
        cx.schedule_periodic_event(us(SINUS), us(SINUS), schedulable!(Self::fire), ()).expect("in the future");
    }

    #[nexosim(schedulable)]
    async fn fire(&mut self) {
        self.blocked -= 1;
        if self.blocked == 0 {
            self.blocked = BLOCKED;
        } else {
            self.wave.send(()).await;
        }
    }
}

#[derive(Serialize, Deserialize, Default)]
struct AvNode {
    wave: Output<()>,
    left_at: Option<u64>,
}

#[Model]
impl AvNode {
    /// A wave from the sinus node reaches the atrium after the link's delay, and the node with it.
    async fn enter(&mut self, _: (), cx: &Context<Self>) {
        let recovery = self.left_at.map(|left| (micros(cx) + LINK - left) as f64);
        let more = recovery.map_or(0.0, |recovery| 780_000.0 * (-recovery / 110_000.0).exp());
        let delay = us(LINK + NODE_BASE + more.round() as u64);
        cx.schedule_event(delay, schedulable!(Self::leave), ()).expect("in the future");
    }

    #[nexosim(schedulable)]
    async fn leave(&mut self, _: (), cx: &Context<Self>) {
        self.left_at = Some(micros(cx));
        self.wave.send(()).await;
    }
}

#[derive(Serialize, Deserialize, Default)]
struct Ventricle {
    beat: Output<()>,
    ready: u64,
    beats: u64,
    digest: u64,
}

#[Model]
impl Ventricle {
    async fn wave(&mut self, _: (), cx: &Context<Self>) {
        let now = micros(cx);
        if now < self.ready {
            return;
        }
        self.ready = now + REFRACTORY;
        let mut tally = Tally { beats: self.beats, digest: self.digest };
        tally.beat(now);
        (self.beats, self.digest) = (tally.beats, tally.digest);
        self.beat.send(()).await;
    }

    async fn pulse(&mut self, _: (), cx: &Context<Self>) {
        if micros(cx) >= self.ready {
            cx.schedule_event(us(LINK), schedulable!(Self::capture), ()).expect("in the future");
        }
    }

    #[nexosim(schedulable)]
    async fn capture(&mut self, _: (), cx: &Context<Self>) {
        self.wave((), cx).await;
    }

    async fn tally(&mut self) -> Counted {
        Counted { beats: self.beats, digest: self.digest }
    }
}

#[derive(Clone, Message, Serialize, Deserialize)]
struct Counted {
    beats: u64,
    digest: u64,
}

#[derive(Serialize, Deserialize, Default)]
struct EscapeCell {
    wave: Output<()>,
    timer: Option<EventKey>,
}

#[Model]
impl EscapeCell {
    #[nexosim(init)]
    async fn init(&mut self, cx: &Context<Self>) {
        self.beat((), cx).await;
    }

    async fn beat(&mut self, _: (), cx: &Context<Self>) {
        if let Some(timer) = self.timer.take() {
            timer.cancel();
        }
        self.timer = Some(cx.schedule_keyed_event(us(ESCAPE), schedulable!(Self::fire), ()).expect("in the future"));
    }

    #[nexosim(schedulable)]
    async fn fire(&mut self) {
        self.timer = None;
        self.wave.send(()).await;
    }
}

#[derive(Serialize, Deserialize, Default)]
struct Device {
    pulse: Output<()>,
    timer: Option<EventKey>,
    blind_until: u64,
}

#[Model]
impl Device {
    #[nexosim(init)]
    async fn init(&mut self, cx: &Context<Self>) {
        self.timer = Some(cx.schedule_keyed_event(us(LOWER), schedulable!(Self::expire), ()).expect("in the future"));
    }

    /// A beat is sensed after the link's delay: the timer runs from there.
    async fn beat(&mut self, _: (), cx: &Context<Self>) {
        if micros(cx) + LINK < self.blind_until {
            return;
        }
        if let Some(timer) = self.timer.take() {
            timer.cancel();
        }
        self.timer = Some(cx.schedule_keyed_event(us(LINK + LOWER), schedulable!(Self::expire), ()).expect("in the future"));
    }

    #[nexosim(schedulable)]
    async fn expire(&mut self, _: (), cx: &Context<Self>) {
        self.blind_until = micros(cx) + BLANKING;
        self.timer = Some(cx.schedule_keyed_event(us(LOWER), schedulable!(Self::expire), ()).expect("in the future"));
        self.pulse.send(()).await;
    }
}

/// Five models, one thread; whole microseconds.
///
/// # Errors
/// Whatever the engine reports.
pub fn run(until: u64) -> Result<Tally, SimulationError> {
    let mut sinus = SinusNode { wave: Output::default(), blocked: BLOCKED };
    let mut node = AvNode::default();
    let mut ventricle = Ventricle::default();
    let mut escape = EscapeCell::default();
    let mut device = Device::default();
    let (sinus_box, node_box, ventricle_box) = (Mailbox::new(), Mailbox::new(), Mailbox::new());
    let (escape_box, device_box) = (Mailbox::new(), Mailbox::new());
    sinus.wave.connect(AvNode::enter, &node_box);
    node.wave.connect(Ventricle::wave, &ventricle_box);
    escape.wave.connect(Ventricle::wave, &ventricle_box);
    device.pulse.connect(Ventricle::pulse, &ventricle_box);
    ventricle.beat.connect(EscapeCell::beat, &escape_box);
    ventricle.beat.connect(Device::beat, &device_box);
    let mut bench = SimInit::with_num_threads(1);
    let tally = QuerySource::new().connect(Ventricle::tally, &ventricle_box).register(&mut bench);
    let mut simulation = bench
        .add_model(sinus, sinus_box, "sinus node")
        .add_model(node, node_box, "AV node")
        .add_model(ventricle, ventricle_box, "ventricle")
        .add_model(escape, escape_box, "escape cell")
        .add_model(device, device_box, "device")
        .init(MonotonicTime::EPOCH)?;
    simulation.step_until(us(until))?;
    let counted = simulation.process_query(&tally, ())?;
    Ok(Tally { beats: counted.beats, digest: counted.digest })
}
