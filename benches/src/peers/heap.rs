//! A small general engine as one writes it in an afternoon: a heap of messages and boxed components.

use crate::rhythm::{BLANKING, BLOCKED, ESCAPE, LINK, LOWER, NODE_BASE, REFRACTORY, SINUS, Tally};
use std::cell::RefCell;
use std::cmp::Reverse;
use std::collections::BinaryHeap;
use std::rc::Rc;

/// What components tell each other and themselves.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
enum Message {
    /// A timer of its own has run out; a number older than its own means that it was cancelled.
    Timer(u32),
    Wave,
    Beat,
    Pulse,
    Capture,
}

trait Component {
    fn receive(&mut self, message: Message, now: u64, engine: &mut Engine);
}

/// Messages on their way: when, in which order they were sent, to whom, what.
#[derive(Default)]
struct Engine {
    queue: BinaryHeap<Reverse<(u64, u64, usize, Message)>>,
    sent: u64,
}

impl Engine {
    fn send(&mut self, at: u64, to: usize, message: Message) {
        self.sent += 1;
        self.queue.push(Reverse((at, self.sent, to, message)));
    }
}

const SINUS_NODE: usize = 0;
const AV_NODE: usize = 1;
const VENTRICLE: usize = 2;
const ESCAPE_CELL: usize = 3;
const DEVICE: usize = 4;

struct SinusNode {
    blocked: u64,
}

impl Component for SinusNode {
    fn receive(&mut self, _: Message, now: u64, engine: &mut Engine) {
        self.blocked -= 1;
        if self.blocked == 0 {
            self.blocked = BLOCKED;
        } else {
            engine.send(now + LINK, AV_NODE, Message::Wave);
        }
        engine.send(now + SINUS, SINUS_NODE, Message::Timer(0));
    }
}

struct AvNode {
    left_at: Option<u64>,
}

impl Component for AvNode {
    fn receive(&mut self, message: Message, now: u64, engine: &mut Engine) {
        if message == Message::Wave {
            let more = self.left_at.map_or(0.0, |left| 780_000.0 * (-((now - left) as f64) / 110_000.0).exp());
            engine.send(now + NODE_BASE + more.round() as u64, AV_NODE, Message::Timer(0));
        } else {
            self.left_at = Some(now);
            engine.send(now, VENTRICLE, Message::Wave);
        }
    }
}

struct Ventricle {
    ready: u64,
    beats: Rc<RefCell<Tally>>,
}

impl Component for Ventricle {
    fn receive(&mut self, message: Message, now: u64, engine: &mut Engine) {
        if now < self.ready {
            return;
        }
        if message == Message::Pulse {
            engine.send(now + LINK, VENTRICLE, Message::Capture);
            return;
        }
        self.ready = now + REFRACTORY;
        self.beats.borrow_mut().beat(now);
        engine.send(now, ESCAPE_CELL, Message::Beat);
        engine.send(now + LINK, DEVICE, Message::Beat);
    }
}

/// A timer that counts how often it was restarted.
#[derive(Default)]
struct Timer(u32);

impl Timer {
    fn restart(&mut self, at: u64, owner: usize, engine: &mut Engine) {
        self.0 += 1;
        engine.send(at, owner, Message::Timer(self.0));
    }

    fn is_over(&self, message: Message) -> bool {
        message == Message::Timer(self.0)
    }
}

struct EscapeCell(Timer);

impl Component for EscapeCell {
    fn receive(&mut self, message: Message, now: u64, engine: &mut Engine) {
        if self.0.is_over(message) {
            engine.send(now, VENTRICLE, Message::Wave);
        }
        if self.0.is_over(message) || message == Message::Beat {
            self.0.restart(now + ESCAPE, ESCAPE_CELL, engine);
        }
    }
}

struct Device {
    timer: Timer,
    blind_until: u64,
}

impl Component for Device {
    fn receive(&mut self, message: Message, now: u64, engine: &mut Engine) {
        if self.timer.is_over(message) {
            self.blind_until = now + BLANKING;
            engine.send(now, VENTRICLE, Message::Pulse);
            self.timer.restart(now + LOWER, DEVICE, engine);
        } else if message == Message::Beat && now >= self.blind_until {
            self.timer.restart(now + LOWER, DEVICE, engine);
        }
    }
}

/// Five components, one heap; whole microseconds.
pub fn run(until: u64) -> Tally {
    let beats = Rc::new(RefCell::new(Tally::default()));
    let mut engine = Engine::default();
    let mut components: [Box<dyn Component>; 5] = [
        Box::new(SinusNode { blocked: BLOCKED }),
        Box::new(AvNode { left_at: None }),
        Box::new(Ventricle { ready: 0, beats: Rc::clone(&beats) }),
        Box::new(EscapeCell(Timer::default())),
        Box::new(Device { timer: Timer::default(), blind_until: 0 }),
    ];
    engine.send(SINUS, SINUS_NODE, Message::Timer(0));
    engine.send(ESCAPE, ESCAPE_CELL, Message::Timer(0));
    engine.send(LOWER, DEVICE, Message::Timer(0));
    while let Some(Reverse((now, _, to, message))) = engine.queue.pop().filter(|Reverse((now, ..))| *now < until) {
        components[to].receive(message, now, &mut engine);
    }
    *beats.borrow()
}
