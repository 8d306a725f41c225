import type { AlarmCleared, AlarmRaised } from '../engine/events.js';
import type { Kept } from './runtime.js';

/** One alarm as it stands: what was raised, and how it ended; null while it stands. */
export interface BookedAlarm {
  readonly raised: AlarmRaised;
  cleared: AlarmCleared | null;
}

const REMEMBERED = 200; // cleared alarms; the alarm log keeps them all

/** The alarms that people may be shown: only what is already durable comes in here. */
export class AlarmBook {
  private readonly standing = new Map<string, BookedAlarm>();
  private readonly cleared: BookedAlarm[] = [];
  raisedCount = 0;

  take(event: Kept): void {
    if (event.event === 'raised') {
      this.raisedCount++;
      this.standing.set(event.alarm, { raised: event, cleared: null });
    } else if (event.event === 'cleared') {
      const alarm = this.standing.get(event.alarm);
      if (!alarm) return;
      this.standing.delete(event.alarm);
      alarm.cleared = event;
      this.cleared.unshift(alarm);
      if (this.cleared.length > REMEMBERED) this.cleared.pop();
    }
  }

  get standingCount(): number {
    return this.standing.size;
  }

  /** Standing alarms, newest first, then lately cleared ones, newest first. */
  list(): readonly BookedAlarm[] {
    return [...[...this.standing.values()].reverse(), ...this.cleared];
  }

  stands(channel: string): boolean {
    for (const alarm of this.standing.values()) if (alarm.raised.channel === channel) return true;
    return false;
  }
}
