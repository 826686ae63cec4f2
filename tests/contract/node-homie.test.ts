/** An independent Homie 5 controller (npm node-homie 5.0.0) discovers the device, reads it, sets it, sees it go (47). */
import {
  DeviceDiscovery,
  HomieDeviceManager,
  type DiscoveryEvent,
  type HomieDevice as Discovered,
} from 'node-homie';
import { describe, expect } from 'vitest';
import { hasMosquitto } from '../mqtt/mosquitto.ts';
import { until } from '../mqtt/observer.ts';
import { test, type Stage } from '../mqtt/stage.ts';

interface Controller {
  readonly devices: HomieDeviceManager;
  readonly errors: unknown[];
  device(): Discovered | undefined;
  value(path: string): string | undefined;
}

async function controller(stage: Stage, url: string): Promise<Controller> {
  const devices = new HomieDeviceManager();
  const discovery = new DeviceDiscovery({ url, topicRoot: 'homie' });
  const errors: unknown[] = [];
  const subscription = discovery.events$.subscribe((event: DiscoveryEvent) => {
    if (event.type === 'error') errors.push(event.error);
    if (event.type === 'add' && !devices.hasDevice(event.deviceId))
      void devices.add(event.makeDevice())?.onInit();
  });
  stage.onEnd(async () => {
    subscription.unsubscribe();
    await discovery.onDestroy();
    await devices.onDestroy();
  });
  await discovery.onInit();
  return {
    devices,
    errors,
    device: () => devices.getDevice('juniper'),
    value: (path) => devices.getProperty(`juniper/${path}`)?.value,
  };
}

describe.skipIf(!hasMosquitto)('an independent controller', () => {
  test('discovers every node and property without an error event and reads their values', async ({
    stage,
  }) => {
    const { url } = await stage.broker();
    const { device } = await stage.rig(url);
    const hub = await controller(stage, url);
    await until('ready', () => hub.device()?.state === 'ready');
    await until('the values', () => hub.value('dispatch/order') !== undefined);
    const found = Object.values(hub.device()?.nodes ?? {}).map((node) => [
      node.id,
      Object.keys(node.properties).length,
    ]);
    expect(Object.fromEntries(found)).toEqual({
      bank: 9,
      plan: 6,
      dispatch: 7,
      comfort: 3,
      night: 3,
      health: 4,
    });
    expect(hub.value('bank/ice-on-hand')).toBe('8.43');
    expect(hub.value('dispatch/command')).toBe('charge-now');
    expect(hub.value('plan/next-change')).toBe('2026-07-14T19:00:00Z');
    expect(JSON.parse(hub.value('dispatch/order') ?? '')).toMatchObject({ command: 'charge-now' });
    device.alert('dry-pump', 'The pump has run dry.');
    await until('the alert', () => hub.device()?.alerts.get('dry-pump') === 'The pump has run dry.');
    expect(hub.errors).toEqual([]);
  });

  test('sets a wish and sees target and value; sees the device leave', async ({ stage }) => {
    const { url } = await stage.broker();
    const { device, sets } = await stage.rig(url);
    const hub = await controller(stage, url);
    await until('the wish', () => hub.value('dispatch/wish') === 'none');
    hub.devices.getProperty('juniper/dispatch/wish')?.setCommand$('save-ice').subscribe();
    await until('the new wish', () => hub.value('dispatch/wish') === 'save-ice');
    expect(hub.devices.getProperty('juniper/dispatch/wish')?.target).toBe('save-ice');
    expect(sets).toEqual([['dispatch/wish', 'save-ice']]);
    await device.stop();
    await until('disconnected', () => hub.device()?.state === 'disconnected');
    expect(hub.errors).toEqual([]);
  });
});
