/** The part of npm node-homie 5.0.0 that the contract test uses; the package's own types are not where it says. */
declare module 'node-homie' {
  interface Subscription {
    unsubscribe(): void;
  }
  interface Observable<T> {
    subscribe(next?: (value: T) => void): Subscription;
  }
  export interface HomieProperty {
    readonly value: string | undefined;
    readonly target: string | undefined;
    setCommand$(value: string): Observable<boolean>;
  }
  export interface HomieNode {
    readonly id: string;
    readonly properties: Readonly<Record<string, HomieProperty>>;
  }
  export interface HomieDevice {
    readonly state: string;
    readonly alerts: ReadonlyMap<string, string>;
    readonly nodes: Readonly<Record<string, HomieNode>>;
    onInit(): Promise<void>;
  }
  export type DiscoveryEvent =
    | { readonly type: 'add'; readonly deviceId: string; makeDevice(): HomieDevice }
    | { readonly type: 'remove'; readonly deviceId: string }
    | { readonly type: 'error'; readonly error?: Error };
  export class DeviceDiscovery {
    constructor(options: { url: string; topicRoot: string });
    readonly events$: Observable<DiscoveryEvent>;
    onInit(): Promise<void>;
    onDestroy(): Promise<void>;
  }
  export class HomieDeviceManager {
    hasDevice(id: string): boolean;
    add(device: HomieDevice): HomieDevice | undefined;
    getDevice(id: string): HomieDevice | undefined;
    getProperty(path: string): HomieProperty | undefined;
    onDestroy(): Promise<unknown>;
  }
}
